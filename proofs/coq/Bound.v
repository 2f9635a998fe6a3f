(** Ultimate bounds: proofs/ultimate-bound.md. *)
Require Import Reals Lra Lia.
Open Scope R_scope.

Lemma Rabs_ends x r : Rabs x <= r -> - r <= x <= r.
Proof. unfold Rabs. destruct (Rcase_abs x); lra. Qed.

(** x⁺ = map x w h, w any [admissible] value afresh at every step; held quantities h may become h⁺ in a step;
    [error x h] is |x − x*(h)|, of several states ‖x − x*(h)‖, of stances also in the norm of the stance at hand. *)
Record model := Model {
  state : Type;
  uncertain : Type;
  held : Type;
  map : state -> uncertain -> held -> state;
  admissible : uncertain -> Prop;
  may_become : held -> held -> Prop;
  error : state -> held -> R }.

Definition one_state {W H : Type} (F : R -> W -> H -> R) (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R) :=
  Model R W H F inW moves (fun x h => Rabs (x - target h)).

Definition trajectory (m : model) (x : nat -> state m) (h : nat -> held m) : Prop :=
  forall n, may_become m (h n) (h (S n)) /\ exists w, admissible m w /\ x (S n) = map m (x n) w (h n).

Definition set (m : model) := state m -> held m -> Prop.

(** The set is mapped into itself, for every w and every movement of the target. *)
Definition kept (m : model) (s : set m) : Prop :=
  forall x h h' w, s x h -> admissible m w -> may_become m h h' -> s (map m x w h) h'.

(** Gain k and residual eps on the set: |e⁺| <= k|e| + eps. *)
Definition pair (m : model) (s : set m) (k eps : R) : Prop :=
  forall x h h' w, s x h -> admissible m w -> may_become m h h' -> error m (map m x w h) h' <= k * error m x h + eps.

Definition bounded (m : model) (s : set m) : Prop := exists D, forall x h, s x h -> error m x h <= D.

(** b is an ultimate bound: for every b' > b there is an N, the same for all trajectories from the set. *)
Definition ultimate (m : model) (s : set m) (b : R) : Prop :=
  forall b', b < b' -> exists N, forall x h, trajectory m x h -> s (x O) (h O) ->
    forall n, (N <= n)%nat -> error m (x n) (h n) < b'.

Lemma stays (m : model) (s : set m) : kept m s ->
  forall x h, trajectory m x h -> s (x O) (h O) -> forall n, s (x n) (h n).
Proof.
  intros K x h T S0 n; induction n as [|n IH]; [exact S0|].
  destruct (T n) as [M [w [A E]]]. rewrite E. now apply (K _ (h n)).
Qed.

Lemma led (m : model) (s : set m) k eps : kept m s -> pair m s k eps ->
  forall x h, trajectory m x h -> s (x O) (h O) ->
  forall n, error m (x (S n)) (h (S n)) <= k * error m (x n) (h n) + eps.
Proof.
  intros K P x h T S0 n. destruct (T n) as [M [w [A E]]]. rewrite E.
  apply P; trivial. now apply stays.
Qed.

(* (1) The error after n steps is at most kⁿ|e_0| + eps(1 − kⁿ)/(1 − k). *)
Theorem envelope (m : model) (s : set m) (k eps : R) :
  0 <= k < 1 -> kept m s -> pair m s k eps ->
  forall x h, trajectory m x h -> s (x O) (h O) ->
  forall n, error m (x n) (h n) <= k ^ n * error m (x O) (h O) + eps * (1 - k ^ n) / (1 - k).
Proof.
  intros Hk K P x h T S0 n; induction n as [|n IH].
  - simpl. unfold Rdiv. rewrite Rminus_diag_eq by reflexivity. lra.
  - assert (L := led m s k eps K P x h T S0 n).
    apply (Rmult_le_compat_l k) in IH; [|lra].
    replace (k ^ S n * error m (x O) (h O) + eps * (1 - k ^ S n) / (1 - k))
      with (k * (k ^ n * error m (x O) (h O) + eps * (1 - k ^ n) / (1 - k)) + eps); [lra|].
    simpl. field. lra.
Qed.

(* (2) For every b > eps/(1 − k) there is an N, the same for all starts in S, such that |e_n| < b for all n >= N. *)
Theorem ultimate_bound (m : model) (s : set m) (k eps : R) :
  0 <= k < 1 -> 0 <= eps -> kept m s -> bounded m s -> pair m s k eps -> ultimate m s (eps / (1 - k)).
Proof.
  intros Hk He K [D HD] P b Hb.
  set (r := b - eps / (1 - k)). assert (Hr : 0 < r) by (unfold r; lra).
  destruct (pow_lt_1_zero k ltac:(rewrite Rabs_pos_eq; lra) (r / (Rabs D + 1))) as [N HN].
  { apply Rdiv_lt_0_compat; trivial. generalize (Rabs_pos D); lra. }
  exists N. intros x h T S0 n Hn.
  assert (E := envelope m s k eps Hk K P x h T S0 n).
  assert (Hp := pow_le k n (proj1 Hk)).
  specialize (HN n Hn). rewrite Rabs_pos_eq in HN by trivial.
  assert (A : k ^ n * error m (x O) (h O) <= k ^ n * (Rabs D + 1)).
  { apply Rmult_le_compat_l; trivial. specialize (HD _ _ S0). generalize (Rle_abs D); lra. }
  assert (B : k ^ n * (Rabs D + 1) < r).
  { apply (Rmult_lt_compat_r (Rabs D + 1)) in HN; [|generalize (Rabs_pos D); lra].
    unfold Rdiv in HN. rewrite Rmult_assoc, Rinv_l in HN; [lra|generalize (Rabs_pos D); lra]. }
  assert (C : eps * (1 - k ^ n) / (1 - k) <= eps / (1 - k)).
  { unfold Rdiv. apply Rmult_le_compat_r; [left; apply Rinv_0_lt_compat; lra|].
    replace eps with (eps * 1) at 2 by ring. apply Rmult_le_compat_l; lra. }
  unfold r in B. lra.
Qed.

(** A map of one state without held quantities or disturbance, in a set of states. *)
Definition plain (f : R -> R) := one_state (fun x (_ _ : unit) => f x) (fun _ => True) (fun _ _ => True) (fun _ => 0).
Definition within (r : R) : set (plain (fun x => x)) := fun x _ => Rabs x <= r.

Fixpoint iterate (f : R -> R) (x : R) (n : nat) : R := match n with O => x | S n => f (iterate f x n) end.

Lemma iterates f x : trajectory (plain f) (iterate f x) (fun _ => tt).
Proof. intro n; split; [exact I|]. now exists tt. Qed.

(* With k <= 1 in place of k < 1 nothing follows: x⁺ = x has k = 1, eps = 0, and errors that stay as large as the set. *)
Example no_bound_at_gain_one :
  let m := plain (fun x => x) in
  kept m (within 1) /\ bounded m (within 1) /\ pair m (within 1) 1 0 /\ forall b, b < 1 -> ~ ultimate m (within 1) b.
Proof.
  repeat split.
  - intros x h h' w Hx _ _. exact Hx.
  - exists 1. intros x h Hx. cbn in *. now rewrite Rminus_0_r.
  - intros x h h' w Hx _ _. cbn. lra.
  - intros b Hb U. destruct (U 1 Hb) as [N HN].
    assert (E : forall n, iterate (fun x => x) 1 n = 1) by (induction n; trivial).
    specialize (HN _ _ (iterates (fun x => x) 1)).
    assert (S0 : within 1 (iterate (fun x => x) 1 O) tt) by (unfold within; rewrite E, Rabs_pos_eq; lra).
    specialize (HN S0 N (le_n N)). cbn in HN. rewrite E, Rminus_0_r, Rabs_pos_eq in HN; lra.
Qed.

(* The limit itself need not be reached: from above eps/(1 − k), x⁺ = k x + eps stays above it for ever. *)
Example limit_not_reached (k eps x : R) :
  0 < k < 1 -> eps / (1 - k) < x -> forall n, eps / (1 - k) < iterate (fun y => k * y + eps) x n.
Proof.
  intros Hk Hx n; induction n as [|n IH]; [exact Hx|]. cbn.
  apply (Rmult_lt_compat_l k) in IH; [|lra].
  replace (eps / (1 - k)) with (k * (eps / (1 - k)) + eps); [lra|]. field. lra.
Qed.

(* Without a bounded set no N serves all starts: x⁺ = x/2 on all numbers. *)
Example no_common_step :
  let m := plain (fun x => x / 2) in let everywhere : set m := fun _ _ => True in
  kept m everywhere /\ pair m everywhere (1 / 2) 0 /\ ~ ultimate m everywhere 0.
Proof.
  repeat split.
  - intros x h h' w _ _ _. cbn. rewrite !Rminus_0_r. unfold Rdiv at 1. rewrite Rabs_mult, (Rabs_pos_eq (/ 2)); lra.
  - intro U. destruct (U 1 ltac:(lra)) as [N HN].
    assert (E : forall n, iterate (fun x => x / 2) (2 ^ N) n = 2 ^ N / 2 ^ n).
    { induction n as [|n IH]; cbn; [field|]. rewrite IH. field. apply pow_nonzero; lra. }
    specialize (HN _ _ (iterates (fun x => x / 2) (2 ^ N)) I N (le_n N)). cbn in HN.
    assert (P : 0 < 2 ^ N) by (apply pow_lt; lra).
    rewrite E, Rminus_0_r in HN. unfold Rdiv in HN. rewrite Rinv_r in HN by lra. rewrite Rabs_pos_eq in HN; lra.
Qed.
