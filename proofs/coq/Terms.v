(** Forward differentiation: proofs/forms.md (1), (5), (6). *)
Require Import Reals Lra Lia FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Mean Vectors Leaves.
Open Scope R_scope.

(** The smooth operations of the claim language; variables have a number, and so have named quantities that may be marked. *)
Inductive term : Type :=
  | Number : R -> term
  | Variable_ : nat -> term
  | Mark : nat -> term -> term
  | Neg : term -> term
  | Add : term -> term -> term
  | Sub : term -> term -> term
  | Mul : term -> term -> term
  | Div : term -> term -> term
  | Power : term -> nat -> term
  | Apply : function -> term -> term
with function : Type := Sqrt | Exp | Log | Sin | Cos | Tan | Sinh | Cosh | Tanh | Atan.

Definition value_of (f : function) (u : R) : R := match f with
  | Sqrt => sqrt u | Exp => exp u | Log => ln u | Sin => sin u | Cos => cos u | Tan => tan u
  | Sinh => sinh u | Cosh => cosh u | Tanh => sinh u / cosh u | Atan => atan u end.

(** Where a derivative is formed: inside the open set on which the function is analytic. *)
Definition inside (f : function) (u : R) : Prop := match f with Sqrt | Log => 0 < u | Tan => cos u <> 0 | _ => True end.

Definition slope_of (f : function) (u : R) : R := match f with
  | Sqrt => / (2 * sqrt u) | Exp => exp u | Log => / u | Sin => cos u | Cos => - sin u | Tan => 1 + tan u ^ 2
  | Sinh => cosh u | Cosh => sinh u | Tanh => 1 - (sinh u / cosh u) ^ 2 | Atan => / (1 + u ^ 2) end.

(** The value, with named quantity n displaced by [by n] in everything built on it and nowhere else. *)
Fixpoint value (e : term) (x : vector) (by_ : vector) : R := match e with
  | Number c => c
  | Variable_ i => x i
  | Mark n e => value e x by_ + by_ n
  | Neg e => - value e x by_
  | Add e f => value e x by_ + value f x by_
  | Sub e f => value e x by_ - value f x by_
  | Mul e f => value e x by_ * value f x by_
  | Div e f => value e x by_ / value f x by_
  | Power e n => value e x by_ ^ n
  | Apply g e => value_of g (value e x by_) end.

Fixpoint defined (e : term) (x : vector) (by_ : vector) : Prop := match e with
  | Number _ | Variable_ _ => True
  | Mark _ e | Neg e | Power e _ => defined e x by_
  | Add e f | Sub e f | Mul e f => defined e x by_ /\ defined f x by_
  | Div e f => defined e x by_ /\ defined f x by_ /\ value f x by_ <> 0
  | Apply g e => defined e x by_ /\ inside g (value e x by_) end.

(** The rules of (5): what the derivative by variable i is (g), and by the marked name n (d). *)
Fixpoint rule (seed : term -> option R) (e : term) (x by_ : vector) : R := match seed e with Some c => c | None => match e with
  | Number _ | Variable_ _ => 0
  | Mark _ e => rule seed e x by_
  | Neg e => - rule seed e x by_
  | Add e f => rule seed e x by_ + rule seed f x by_
  | Sub e f => rule seed e x by_ - rule seed f x by_
  | Mul e f => rule seed e x by_ * value f x by_ + value e x by_ * rule seed f x by_
  | Div e f => (rule seed e x by_ - value e x by_ / value f x by_ * rule seed f x by_) / value f x by_
  | Power e n => INR n * value e x by_ ^ pred n * rule seed e x by_
  | Apply g e => slope_of g (value e x by_) * rule seed e x by_ end end.

Definition by_variable (i : nat) (e : term) : option R := match e with Variable_ j => if Nat.eqb j i then Some 1 else Some 0 | _ => None end.

(** By a marked name: the name's own expression is cut, and its derivative is 1; every variable has derivative 0. *)
Definition by_name (n : nat) (e : term) : option R := match e with Mark m _ => if Nat.eqb m n then Some 1 else None | _ => None end.

Lemma function_derive g u : inside g u -> is_derive (value_of g) u (slope_of g u).
Proof.
  assert (C : cosh u <> 0) by (unfold cosh; assert (0 < exp u) by apply exp_pos; assert (0 < exp (- u)) by apply exp_pos; lra).
  destruct g; intro H.
  - apply is_derive_Reals. now apply derivable_pt_lim_sqrt.
  - apply is_derive_Reals, derivable_pt_lim_exp.
  - apply is_derive_Reals. now apply derivable_pt_lim_ln.
  - apply is_derive_Reals, derivable_pt_lim_sin.
  - apply is_derive_Reals, derivable_pt_lim_cos.
  - change (is_derive (fun v => sin v / cos v) u (1 + (sin u / cos u) ^ 2)).
    replace (1 + (sin u / cos u) ^ 2) with ((cos u * cos u - sin u * - sin u) / (cos u) ^ 2) by (field; trivial).
    apply is_derive_div; trivial; apply is_derive_Reals; [apply derivable_pt_lim_sin|apply derivable_pt_lim_cos].
  - apply is_derive_Reals, derivable_pt_lim_sinh.
  - apply is_derive_Reals, derivable_pt_lim_cosh.
  - change (is_derive (fun v => sinh v / cosh v) u (1 - (sinh u / cosh u) ^ 2)).
    replace (1 - (sinh u / cosh u) ^ 2) with ((cosh u * cosh u - sinh u * sinh u) / (cosh u) ^ 2) by (field; trivial).
    apply is_derive_div; trivial; apply is_derive_Reals; [apply derivable_pt_lim_sinh|apply derivable_pt_lim_cosh].
  - apply is_derive_Reals. change (derivable_pt_lim atan u (/ (1 + u ^ 2))).
    apply derivable_pt_lim_atan.
Qed.

(** P of a term and of all below it, down to where the seed cuts. *)
Fixpoint every (seed : term -> option R) (P : term -> Prop) (e : term) : Prop := P e /\ match seed e with Some _ => True | None => match e with
  | Number _ | Variable_ _ => True
  | Mark _ e | Neg e | Power e _ | Apply _ e => every seed P e
  | Add e f | Sub e f | Mul e f | Div e f => every seed P e /\ every seed P f end end.

(** What a leaf, or a term that the seed cuts, has as its derivative along a path of variables and displacements. *)
Definition seeded (seed : term -> option R) (x by_ : R -> vector) (t : R) (e : term) : Prop := match seed e with
  | Some c => is_derive (fun s => value e (x s) (by_ s)) t c
  | None => match e with Variable_ i => is_derive (fun s => x s i) t 0 | Mark n _ => is_derive (fun s => by_ s n) t 0 | _ => True end end.

Lemma rules_hold (seed : term -> option R) (x by_ : R -> vector) (t : R) (e : term) : defined e (x t) (by_ t) ->
  every seed (seeded seed x by_ t) e -> is_derive (fun s => value e (x s) (by_ s)) t (rule seed e (x t) (by_ t)).
Proof.
  intros D Sd. induction e as [c|i|n e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH n|g e IH];
    cbn [every] in Sd; unfold seeded at 1 in Sd; cbn [rule];
    match goal with |- is_derive _ _ (match seed ?e with _ => _ end) => destruct (seed e); [exact (proj1 Sd)|] end;
    destruct Sd as [Q Sd]; cbn [value]; cbn [defined] in D.
  - apply (is_derive_const (V := R_NormedModule)).
  - exact Q.
  - replace (rule seed e (x t) (by_ t)) with (rule seed e (x t) (by_ t) + 0) by ring.
    apply (is_derive_plus (V := R_NormedModule) (fun s => value e (x s) (by_ s)) (fun s => by_ s n)); [now apply IH|exact Q].
  - apply (is_derive_opp (V := R_NormedModule) (fun s => value e (x s) (by_ s))). now apply IH.
  - apply (is_derive_plus (V := R_NormedModule) (fun s => value e (x s) (by_ s)) (fun s => value f (x s) (by_ s))); [now apply IHe|now apply IHf].
  - apply (is_derive_minus (V := R_NormedModule) (fun s => value e (x s) (by_ s)) (fun s => value f (x s) (by_ s))); [now apply IHe|now apply IHf].
  - apply (is_derive_mult (fun s => value e (x s) (by_ s)) (fun s => value f (x s) (by_ s))); [now apply IHe|now apply IHf|intros; apply Rmult_comm].
  - destruct D as [De [Df Nf]]. set (v := value f (x t) (by_ t)) in *. set (w := value e (x t) (by_ t)) in *.
    replace ((rule seed e (x t) (by_ t) - w / v * rule seed f (x t) (by_ t)) / v)
      with ((rule seed e (x t) (by_ t) * v - w * rule seed f (x t) (by_ t)) / v ^ 2) by (field; trivial).
    apply (is_derive_div (fun s => value e (x s) (by_ s)) (fun s => value f (x s) (by_ s))); [now apply IHe|now apply IHf|exact Nf].
  - replace (INR n * value e (x t) (by_ t) ^ pred n * rule seed e (x t) (by_ t)) with (INR n * rule seed e (x t) (by_ t) * value e (x t) (by_ t) ^ pred n) by ring.
    apply (is_derive_pow (fun s => value e (x s) (by_ s))). now apply IH.
  - destruct D as [De Ig]. rewrite Rmult_comm.
    apply (is_derive_comp (V := R_NormedModule) (value_of g) (fun s => value e (x s) (by_ s))); [now apply function_derive|now apply IH].
Qed.

(* Forms (5): the rules of forward differentiation give the partial derivative by variable i, wherever all operations are defined. *)
Theorem gradient_rules (e : term) (i : nat) (x by_ : vector) : defined e x by_ ->
  is_derive (fun s => value e (put x i s) by_) (x i) (rule (by_variable i) e x by_).
Proof.
  intro D. assert (E : put x i (x i) = x).
  { apply functional_extensionality. intro j. unfold put. destruct (Nat.eqb_spec j i) as [->|]; reflexivity. }
  assert (R0 := rules_hold (by_variable i) (fun s => put x i s) (fun _ => by_) (x i) e). cbv beta in R0. rewrite E in R0.
  apply R0; trivial. clear. induction e as [c|j|m e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH k|g e IH];
    cbn [every by_variable]; repeat match goal with |- _ /\ _ => split end; try exact I; try (apply IH); try (apply IHe); try (apply IHf).
  - unfold seeded; cbn. destruct (Nat.eqb j i) eqn:Q; unfold put; rewrite Q.
    + apply (is_derive_id (K := R_AbsRing)).
    + apply (is_derive_const (V := R_NormedModule)).
  - destruct (Nat.eqb j i); exact I.
  - unfold seeded; cbn. apply (is_derive_const (V := R_NormedModule)).
Qed.

(** The name n does not occur; and not below itself, as no quantity is defined by itself. *)
Fixpoint without (n : nat) (e : term) : Prop := match e with
  | Number _ | Variable_ _ => True
  | Mark m e => m <> n /\ without n e
  | Neg e | Power e _ | Apply _ e => without n e
  | Add e f | Sub e f | Mul e f | Div e f => without n e /\ without n f end.

Fixpoint not_by_itself (n : nat) (e : term) : Prop := match e with
  | Number _ | Variable_ _ => True
  | Mark m e => if Nat.eqb m n then without n e else not_by_itself n e
  | Neg e | Power e _ | Apply _ e => not_by_itself n e
  | Add e f | Sub e f | Mul e f | Div e f => not_by_itself n e /\ not_by_itself n f end.

Lemma value_without n e x by_ s : without n e -> value e x (put by_ n s) = value e x by_.
Proof.
  induction e as [c|i|m e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH k|g e IH]; cbn; intro W; trivial;
    try (rewrite IH by apply W); try (rewrite IHe by apply W; rewrite IHf by apply W); trivial.
  f_equal. unfold put. destruct W as [W _]. apply Nat.eqb_neq in W. now rewrite W.
Qed.

(* Forms (6): with n + τ put for the name n in everything built on it, the rules with n′ = 1 and its own expression cut give the derivative by τ. *)
Theorem mark_rules (e : term) (n : nat) (x by_ : vector) : defined e x by_ -> not_by_itself n e ->
  is_derive (fun s => value e x (put by_ n s)) (by_ n) (rule (by_name n) e x by_).
Proof.
  intros D W. assert (E : put by_ n (by_ n) = by_).
  { apply functional_extensionality. intro j. unfold put. destruct (Nat.eqb_spec j n) as [->|]; reflexivity. }
  assert (R0 := rules_hold (by_name n) (fun _ => x) (fun s => put by_ n s) (by_ n) e). cbv beta in R0. rewrite E in R0.
  apply R0; trivial. clear D E R0. induction e as [c|i|m e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH k|g e IH];
    cbn [every by_name]; cbn in W; repeat match goal with |- _ /\ _ => split end; try exact I; try (apply IH; apply W); try (apply IHe; apply W); try (apply IHf; apply W).
  - unfold seeded; cbn. apply (is_derive_const (V := R_NormedModule)).
  - unfold seeded; cbn. destruct (Nat.eqb m n) eqn:Q.
    + apply (is_derive_ext (fun s => value e x by_ + s)).
      * intro s. rewrite value_without by trivial. unfold put. now rewrite Q.
      * replace 1 with (0 + 1) by ring. apply (is_derive_plus (V := R_NormedModule)); [apply (is_derive_const (V := R_NormedModule))|apply (is_derive_id (K := R_AbsRing))].
    + unfold put. rewrite Q. apply (is_derive_const (V := R_NormedModule)).
  - destruct (Nat.eqb m n); [exact I|apply IH; apply W].
Qed.

Definition curve_of (f : function) (u : R) : R := match f with
  | Sqrt => - (/ (2 * sqrt u) / (2 * u)) | Exp => exp u | Log => - (/ u) ^ 2 | Sin => - sin u | Cos => - cos u
  | Tan => 2 * tan u * (1 + tan u ^ 2) | Sinh => sinh u | Cosh => cosh u
  | Tanh => - (2 * (sinh u / cosh u) * (1 - (sinh u / cosh u) ^ 2)) | Atan => - (2 * u * (/ (1 + u ^ 2)) ^ 2) end.

(** The rules of (5) for the derivative by variable i of the derivative that a seed gives. *)
Fixpoint second_rule (seed : term -> option R) (i : nat) (e : term) (x by_ : vector) : R :=
  let d f := rule seed f x by_ in let g f := rule (by_variable i) f x by_ in let v f := value f x by_ in
  match seed e with Some _ => 0 | None => match e with
  | Number _ | Variable_ _ => 0
  | Mark _ e => second_rule seed i e x by_
  | Neg e => - second_rule seed i e x by_
  | Add e f => second_rule seed i e x by_ + second_rule seed i f x by_
  | Sub e f => second_rule seed i e x by_ - second_rule seed i f x by_
  | Mul e f => second_rule seed i e x by_ * v f + d e * g f + g e * d f + v e * second_rule seed i f x by_
  | Div e f => (second_rule seed i e x by_ - rule (by_variable i) (Div e f) x by_ * d f - v e / v f * second_rule seed i f x by_
      - (d e - v e / v f * d f) / v f * g f) / v f
  | Power e n => INR n * INR (pred n) * v e ^ pred (pred n) * d e * g e + INR n * v e ^ pred n * second_rule seed i e x by_
  | Apply f e => curve_of f (v e) * d e * g e + slope_of f (v e) * second_rule seed i e x by_ end end.

Lemma slope_derive g u : inside g u -> is_derive (slope_of g) u (curve_of g u).
Proof.
  intro H. assert (F := function_derive g u H).
  assert (C : cosh u <> 0) by (unfold cosh; assert (0 < exp u) by apply exp_pos; assert (0 < exp (- u)) by apply exp_pos; lra).
  destruct g.
  - assert (S : 0 < sqrt u) by now apply sqrt_lt_R0. assert (Q : sqrt u * sqrt u = u) by (apply sqrt_sqrt; cbn in H; lra). cbn in H.
    change (is_derive (fun v => / (2 * sqrt v)) u (- (/ (2 * sqrt u) / (2 * u)))).
    replace (- (/ (2 * sqrt u) / (2 * u))) with (- (2 * / (2 * sqrt u)) / (2 * sqrt u) ^ 2).
    2:{ rewrite <- Q at 4. field. lra. }
    apply (is_derive_inv (fun v => 2 * sqrt v)); [|lra]. apply (is_derive_scal sqrt). exact F.
  - exact F.
  - cbn in H. change (is_derive (fun v => / v) u (- (/ u) ^ 2)). replace (- (/ u) ^ 2) with (- 1 / u ^ 2) by (field; lra).
    apply (is_derive_inv (fun v => v)); [apply (is_derive_id (K := R_AbsRing))|lra].
  - apply is_derive_Reals, derivable_pt_lim_cos.
  - change (is_derive (fun v => - sin v) u (- cos u)). apply (is_derive_opp (V := R_NormedModule) sin), is_derive_Reals, derivable_pt_lim_sin.
  - change (is_derive (fun v => 1 + tan v ^ 2) u (2 * tan u * (1 + tan u ^ 2))).
    replace (2 * tan u * (1 + tan u ^ 2)) with (0 + INR 2 * (1 + tan u ^ 2) * tan u ^ pred 2) by (cbn; ring).
    apply (is_derive_plus (V := R_NormedModule)); [apply (is_derive_const (V := R_NormedModule))|]. apply (is_derive_pow _ 2). exact F.
  - apply is_derive_Reals, derivable_pt_lim_cosh.
  - apply is_derive_Reals, derivable_pt_lim_sinh.
  - set (th := fun v => sinh v / cosh v). change (is_derive (fun v => 1 - th v ^ 2) u (- (2 * th u * (1 - th u ^ 2)))).
    replace (- (2 * th u * (1 - th u ^ 2))) with (0 - INR 2 * (1 - th u ^ 2) * th u ^ pred 2) by (cbn; ring).
    apply (is_derive_minus (V := R_NormedModule)); [apply (is_derive_const (V := R_NormedModule))|]. apply (is_derive_pow _ 2). exact F.
  - change (is_derive (fun v => / (1 + v ^ 2)) u (- (2 * u * (/ (1 + u ^ 2)) ^ 2))). assert (P : 1 + u ^ 2 <> 0) by nra.
    replace (- (2 * u * (/ (1 + u ^ 2)) ^ 2)) with (- (0 + INR 2 * 1 * u ^ pred 2) / (1 + u ^ 2) ^ 2) by (cbn; field; cbn in P; lra).
    apply (is_derive_inv (fun v => 1 + v ^ 2)); [|exact P]. apply (is_derive_plus (V := R_NormedModule)); [apply (is_derive_const (V := R_NormedModule))|].
    apply (is_derive_pow (fun v => v) 2), (is_derive_id (K := R_AbsRing)).
Qed.

Lemma is_derive_eq (f : R -> R) (t d d' : R) : is_derive f t d -> d = d' -> is_derive f t d'.
Proof. now intros D <-. Qed.

Lemma is_derive_product (f g : R -> R) (t df dg : R) : is_derive f t df -> is_derive g t dg -> is_derive (fun s => f s * g s) t (df * g t + f t * dg).
Proof. intros F G. apply (is_derive_mult f g t df dg F G). intros; apply Rmult_comm. Qed.

Lemma is_derive_quotient (f g : R -> R) (t df dg : R) : is_derive f t df -> is_derive g t dg -> g t <> 0 ->
  is_derive (fun s => f s / g s) t ((df - f t / g t * dg) / g t).
Proof.
  intros F G N. replace ((df - f t / g t * dg) / g t) with ((df * g t - f t * dg) / g t ^ 2) by (field; exact N).
  now apply is_derive_div.
Qed.

(* Forms (5), second derivatives: the rules give the derivative by variable i of what the rules of a mark, or of a variable, gave. *)
Theorem second_rules (seed : term -> option R) (e : term) (i : nat) (x by_ : vector) : defined e x by_ ->
  is_derive (fun s => rule seed e (put x i s) by_) (x i) (second_rule seed i e x by_).
Proof.
  intro D. assert (E : put x i (x i) = x).
  { apply functional_extensionality. intro j. unfold put. destruct (Nat.eqb_spec j i) as [->|]; reflexivity. }
  assert (V := fun f => gradient_rules f i x by_).
  induction e as [c|j|m e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH k|g e IH];
    cbn [rule second_rule]; (match goal with |- context [match seed ?e with _ => _ end] => destruct (seed e) end;
    [apply (is_derive_const (V := R_NormedModule))|]); cbn [defined] in D; cbv zeta.
  - apply (is_derive_const (V := R_NormedModule)).
  - apply (is_derive_const (V := R_NormedModule)).
  - now apply IH.
  - apply (is_derive_opp (V := R_NormedModule)). now apply IH.
  - apply (is_derive_plus (V := R_NormedModule)); [now apply IHe|now apply IHf].
  - apply (is_derive_minus (V := R_NormedModule)); [now apply IHe|now apply IHf].
  - destruct D as [De Df]. eapply is_derive_eq.
    + apply (is_derive_plus (V := R_NormedModule)); apply is_derive_product; [now apply IHe|now apply V|now apply V|now apply IHf].
    + cbv beta. rewrite ?E. unfold plus, minus, opp, scal, mult; cbn -[INR pow pred]. ring.
  - destruct D as [De [Df Nf]]. eapply is_derive_eq.
    + apply is_derive_quotient; [|now apply V|now rewrite E].
      apply (is_derive_minus (V := R_NormedModule)); [now apply IHe|].
      apply is_derive_product; [|now apply IHf]. apply is_derive_quotient; [now apply V|now apply V|now rewrite E].
    + cbv beta. rewrite ?E. unfold plus, minus, opp, scal, mult; cbn -[INR pow pred rule value]. cbn [rule by_variable]. field. exact Nf.
  - eapply is_derive_eq.
    + apply is_derive_product; [|now apply IH]. apply (is_derive_scal (fun s => value e (put x i s) by_ ^ pred k)).
      apply (is_derive_pow (fun s => value e (put x i s) by_)). now apply V.
    + cbv beta. rewrite ?E. unfold plus, minus, opp, scal, mult; cbn -[INR pow pred]. ring.
  - destruct D as [De Ig]. eapply is_derive_eq.
    + apply is_derive_product; [|now apply IH].
      apply (is_derive_comp (V := R_NormedModule) (slope_of g) (fun s => value e (put x i s) by_)); [|now apply V].
      rewrite E. now apply slope_derive.
    + cbv beta. rewrite ?E. unfold plus, minus, opp, scal, mult; cbn -[INR pow pred]. ring.
Qed.

(** Intervals given to terms, each holding the results of its operation for all arguments in those of its operands: proofs/rounding.md. *)
Definition within (i : R * R) (u : R) : Prop := fst i <= u <= snd i.

Fixpoint outward (iv : term -> R * R) (x : vector -> Prop) (e : term) : Prop := match e with
  | Number c => within (iv e) c
  | Variable_ j => forall y, x y -> within (iv e) (y j)
  | Mark _ f => outward iv x f /\ forall u, within (iv f) u -> within (iv e) u
  | Neg f => outward iv x f /\ forall u, within (iv f) u -> within (iv e) (- u)
  | Add f g => outward iv x f /\ outward iv x g /\ forall u v, within (iv f) u -> within (iv g) v -> within (iv e) (u + v)
  | Sub f g => outward iv x f /\ outward iv x g /\ forall u v, within (iv f) u -> within (iv g) v -> within (iv e) (u - v)
  | Mul f g => outward iv x f /\ outward iv x g /\ forall u v, within (iv f) u -> within (iv g) v -> within (iv e) (u * v)
  | Div f g => outward iv x f /\ outward iv x g /\ forall u v, within (iv f) u -> within (iv g) v -> v <> 0 /\ within (iv e) (u / v)
  | Power f k => outward iv x f /\ forall u, within (iv f) u -> within (iv e) (u ^ k)
  | Apply h f => outward iv x f /\ forall u, within (iv f) u -> within (iv e) (value_of h u) end.

(* Forms (1): f evaluated over B contains f(B). *)
Theorem direct (iv : term -> R * R) (box : vector -> Prop) (e : term) : outward iv box e ->
  forall x, box x -> within (iv e) (value e x (fun _ => 0)).
Proof.
  intros O x B. induction e as [c|j|m e IH|e IH|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IHe f IHf|e IH k|h e IH]; cbn in *;
    try (now apply O); try (rewrite Rplus_0_r); destruct O as [O P]; try (apply P; now apply IH); destruct P as [O' P]; apply P; auto.
Qed.
