(** Enclosures over boxes: proofs/forms.md, proofs/splitting.md, proofs/corners.md, proofs/reading.md, proofs/matrix.md (6). *)
Require Import Reals Lra Lia List FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Leaves.
Open Scope R_scope.

(** A box of n variables, and functions that are smooth but for finitely many points along every segment in it, with gradients in g. *)
Definition box (n : nat) (lo hi x : vector) : Prop := forall i, (i < n)%nat -> lo i <= x i <= hi i.

Definition gradients (n : nat) (f : vector -> R) (g : vector -> Prop) (x y : vector) : Prop :=
  continuous_over (between 0 1) (fun t => f (on x y t)) /\
  exists cuts, forall t, 0 < t < 1 -> ~ In t cuts -> exists d, g d /\ is_derive (fun t => f (on x y t)) t (dot n d (subtract x y)).

Lemma mean_of_gradients n f g x y lo hi : gradients n f g x y ->
  (forall d, g d -> lo <= dot n d (subtract x y) <= hi) -> lo <= f x - f y <= hi.
Proof.
  intros [C [cuts D]] B. assert (M := mean_value (fun t => f (on x y t)) 0 1 cuts lo hi Rle_0_1 C).
  assert (on x y 1 = x) as E1 by (apply functional_extensionality; intro; unfold on; ring).
  assert (on x y 0 = y) as E0 by (apply functional_extensionality; intro; unfold on; ring).
  cbv beta in M. rewrite E1, E0, Rminus_0_r, !Rmult_1_r in M. apply M.
  intros t Ht N. destruct (D t Ht N) as [d [Gd Hd]]. exists (dot n d (subtract x y)). split; [exact Hd|now apply B].
Qed.

(* Forms (2), (7): f(x) lies within Σ sup |g_i (x_i − c_i)| of f(c), for gradients whose entries lie in [p_i, q_i]. *)
Theorem centred (n : nat) (f : vector -> R) (p q r c x : vector) :
  gradients n f (fun d => forall i, (i < n)%nat -> p i <= d i <= q i) x c -> (forall i, (i < n)%nat -> Rabs (x i - c i) <= r i) ->
  Rabs (f x - f c) <= sum n (fun i => Rmax (Rabs (p i)) (Rabs (q i)) * r i).
Proof.
  intros G R0. apply Rabs_le_between. apply (mean_of_gradients n f _ x c _ _ G). intros d Hd. apply Rabs_ends.
  eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros i Hi. rewrite Rabs_mult.
  apply Rmult_le_compat; try apply Rabs_pos; [|now apply R0]. specialize (Hd i Hi).
  assert (G1 := Rmax_l (Rabs (p i)) (Rabs (q i))). assert (G2 := Rmax_r (Rabs (p i)) (Rabs (q i))).
  apply Rabs_ends in G1. apply Rabs_ends in G2. apply Rabs_le_between. lra.
Qed.

(* Forms (3), (7): moved to the end of its range where its slope is settled (at its place elsewhere), no variable makes f smaller. *)
Theorem monotone (n : nat) (f : vector -> R) (lo hi x y : vector) :
  gradients n f (fun d => forall i, (i < n)%nat -> (0 <= d i /\ y i = hi i) \/ (d i <= 0 /\ y i = lo i) \/ y i = x i) y x ->
  box n lo hi x -> f x <= f y.
Proof.
  intros G B. assert (H : forall d, (forall i, (i < n)%nat -> (0 <= d i /\ y i = hi i) \/ (d i <= 0 /\ y i = lo i) \/ y i = x i) ->
    0 <= dot n d (subtract y x)).
  { intros d Hd. apply sum_nonneg. intros i Hi. specialize (B i Hi). unfold subtract.
    destruct (Hd i Hi) as [[S E]|[[S E]|E]]; rewrite E; nra. }
  destruct G as [C [cuts D]]. assert (M := mean_below (fun t => f (on y x t)) 0 1 cuts 0 Rle_0_1 C).
  assert (E1 : on y x 1 = y) by (apply functional_extensionality; intro; unfold on; ring).
  assert (E0 : on y x 0 = x) by (apply functional_extensionality; intro; unfold on; ring).
  cbv beta in M. rewrite E1, E0 in M. enough (0 * (1 - 0) <= f y - f x) by lra. apply M.
  intros t Ht N. destruct (D t Ht N) as [d [Gd E]]. exists (dot n d (subtract y x)). split; [exact E|now apply H].
Qed.

(* Forms (3) asks for a settled sign: x² on [−1, 1] is larger at −1 than at 0, and its slope is of both signs. *)
Example sign_not_settled : let f x := x * x in f 0 < f (-1) /\ f 0 < f 1.
Proof. cbv zeta. lra. Qed.

(* Forms (4), along the segment from c to x, u(t) = f(c + t(x − c)): if u'' lies in [lo, hi], u(1) − u(0) − u'(0) lies in [lo/2, hi/2]. *)
Theorem second_order (u u1 u2 : R -> R) (lo hi : R) :
  (forall t, 0 <= t <= 1 -> is_derive u t (u1 t)) -> (forall t, 0 <= t <= 1 -> is_derive u1 t (u2 t)) ->
  (forall t, 0 <= t <= 1 -> lo <= u2 t <= hi) -> lo / 2 <= u 1 - u 0 - u1 0 <= hi / 2.
Proof.
  intros D1 D2 B.
  assert (C : forall (v v' : R -> R) (s : R -> Prop), (forall t, 0 <= t <= 1 -> is_derive v t (v' t)) -> (forall t, s t -> 0 <= t <= 1) -> continuous_over s v).
  { intros v v' s D I t Ht eps He.
    assert (Cp : continuity_pt v t) by (apply derivable_continuous_pt; exists (v' t); apply is_derive_Reals, D, I, Ht).
    destruct (Cp eps He) as [d [Hd Q]]. exists d. split; [exact Hd|]. intros y _ Hy.
    destruct (Req_dec y t) as [->|N]; [rewrite Rminus_diag_eq, Rabs_R0; trivial|].
    apply (Q y). split; [split; [exact Logic.I|auto]|exact Hy]. }
  (* u(t) − u(0) − t u'(0) against lo t²/2 and hi t²/2 *)
  assert (S1 : forall t, 0 <= t <= 1 -> lo * t <= u1 t - u1 0 <= hi * t).
  { intros t Ht. assert (M := mean_value u1 0 t nil lo hi (proj1 Ht)). rewrite Rminus_0_r in M. apply M.
    - apply (C u1 u2); trivial. unfold between; intros; lra.
    - intros z Hz _. exists (u2 z). split; [apply D2; lra|apply B; lra]. }
  assert (Dk : forall k t, 0 <= t <= 1 -> is_derive (fun t => u t - t * u1 0 - k * (t * t) / 2) t (u1 t - u1 0 - k * t)).
  { intros k t Ht. specialize (D1 t Ht). auto_derive; [now exists (u1 t)|].
    replace (Derive (fun x => u x) t) with (u1 t) by (symmetry; now apply is_derive_unique). field. }
  assert (Low : 0 <= (u 1 - 1 * u1 0 - lo * (1 * 1) / 2) - (u 0 - 0 * u1 0 - lo * (0 * 0) / 2)).
  { destruct (mean_smooth (fun t => u t - t * u1 0 - lo * (t * t) / 2) 0 1 (fun d => 0 <= d) Rlt_0_1) as [d [P Q]]; [| |cbv beta in Q; lra].
    - apply (C _ (fun t => u1 t - u1 0 - lo * t)); [apply Dk|unfold between; intros; lra].
    - intros t Ht _. exists (u1 t - u1 0 - lo * t). split; [apply Dk; lra|]. specialize (S1 t ltac:(lra)). lra. }
  assert (High : (u 1 - 1 * u1 0 - hi * (1 * 1) / 2) - (u 0 - 0 * u1 0 - hi * (0 * 0) / 2) <= 0).
  { destruct (mean_smooth (fun t => u t - t * u1 0 - hi * (t * t) / 2) 0 1 (fun d => d <= 0) Rlt_0_1) as [d [P Q]]; [| |cbv beta in Q; lra].
    - apply (C _ (fun t => u1 t - u1 0 - hi * t)); [apply Dk|unfold between; intros; lra].
    - intros t Ht _. exists (u1 t - u1 0 - hi * t). split; [apply Dk; lra|]. specialize (S1 t ltac:(lra)). lra. }
  lra.
Qed.

(* Forms (4): with |x_i − c_i| <= r_i, f(x) − f(c) − Σ f_i(c)(x_i − c_i) lies in Σ h_ii [0, r_i²/2] + Σ_{i<j} h_ij [−r_i r_j, r_i r_j]. *)
Theorem second_order_box (n : nat) (u u1 : R -> R) (h : R -> matrix) (e r : vector) (low high : matrix) :
  (forall t, 0 <= t <= 1 -> is_derive u t (u1 t)) ->
  (forall t, 0 <= t <= 1 -> is_derive u1 t (sum n (fun i => sum n (fun j => h t i j * e i * e j)))) ->
  (forall t i j, 0 <= t <= 1 -> h t i j = h t j i) -> (forall i, (i < n)%nat -> Rabs (e i) <= r i) ->
  (forall t i z, 0 <= t <= 1 -> (i < n)%nat -> 0 <= z <= r i * r i / 2 -> low i i <= h t i i * z <= high i i) ->
  (forall t i j z, 0 <= t <= 1 -> (j < i)%nat -> (i < n)%nat -> Rabs z <= r j * r i -> low i j <= h t i j * z <= high i j) ->
  sum n (fun i => sum (S i) (fun j => low i j)) <= u 1 - u 0 - u1 0 <= sum n (fun i => sum (S i) (fun j => high i j)).
Proof.
  intros D1 D2 Sym Re Diag Off.
  assert (Half : forall t, 0 <= t <= 1 -> sum n (fun i => sum n (fun j => h t i j * e i * e j))
    = 2 * sum n (fun i => h t i i * (e i * e i / 2) + sum i (fun j => h t i j * (e j * e i)))).
  { intros t Ht. clear -Sym Ht. induction n as [|q IH]; [cbn; ring|].
    cbn [sum]. rewrite sum_plus, IH.
    rewrite (sum_ext q (fun i => h t i q * e i * e q) (fun j => h t q j * (e j * e q))) by (intros i _; rewrite (Sym t i q Ht); ring).
    rewrite (sum_ext q (fun j => h t q j * e q * e j) (fun j => h t q j * (e j * e q))) by (intros; ring). field. }
  assert (B : forall t, 0 <= t <= 1 -> sum n (fun i => sum (S i) (fun j => low i j))
    <= sum n (fun i => h t i i * (e i * e i / 2) + sum i (fun j => h t i j * (e j * e i))) <= sum n (fun i => sum (S i) (fun j => high i j))).
  { intros t Ht.
    assert (Sq : forall i, (i < n)%nat -> 0 <= e i * e i / 2 <= r i * r i / 2).
    { intros i Hi. specialize (Re i Hi). assert (P := Rabs_pos (e i)). assert (Q : e i * e i = Rabs (e i) * Rabs (e i)).
      { rewrite <- Rabs_mult, Rabs_pos_eq; [reflexivity|nra]. } rewrite Q. nra. }
    assert (Pr : forall i j, (j < i)%nat -> (i < n)%nat -> Rabs (e j * e i) <= r j * r i).
    { intros i j Hj Hi. rewrite Rabs_mult. apply Rmult_le_compat; try apply Rabs_pos; apply Re; lia. }
    split; apply sum_le; intros i Hi; cbn [sum]; rewrite Rplus_comm; apply Rplus_le_compat;
      try (apply (Diag t i (e i * e i / 2) Ht Hi), Sq, Hi); apply sum_le; intros j Hj; apply (Off t i j (e j * e i) Ht Hj Hi), Pr; trivial. }
  assert (T := second_order u u1 _ (2 * sum n (fun i => sum (S i) (fun j => low i j))) (2 * sum n (fun i => sum (S i) (fun j => high i j))) D1 D2).
  assert (T' := T ltac:(intros t Ht; cbv beta; rewrite (Half t Ht); specialize (B t Ht); lra)). lra.
Qed.

(** Splitting trees: a bisection of variable i at the middle, or a leaf. *)
Inductive tree : Type := leaf : tree | bisect : nat -> tree -> tree -> tree.

Definition put_at (x : vector) (i : nat) (a : R) : vector := put x i a.

Fixpoint leaves (t : tree) (lo hi : vector) : list (vector * vector) :=
  match t with
  | leaf => (lo, hi) :: nil
  | bisect i low high => let m := (lo i + hi i) / 2 in leaves low lo (put_at hi i m) ++ leaves high (put_at lo i m) hi
  end.

(* Splitting (1): the leaves of a tree cover its cell. *)
Theorem leaves_cover (n : nat) (t : tree) : forall lo hi x, box n lo hi x -> exists b, In b (leaves t lo hi) /\ box n (fst b) (snd b) x.
Proof.
  induction t as [|i low IHlow high IHhigh]; intros lo hi x B; cbn; [exists (lo, hi); auto|].
  set (m := (lo i + hi i) / 2). destruct (Rle_dec (x i) m) as [L|L].
  - destruct (IHlow lo (put_at hi i m) x) as [b [I Bb]].
    + intros j Hj. specialize (B j Hj). unfold put_at, put. destruct (Nat.eqb_spec j i) as [->|]; lra.
    + exists b. split; [apply in_or_app; now left|exact Bb].
  - destruct (IHhigh (put_at lo i m) hi x) as [b [I Bb]].
    + intros j Hj. specialize (B j Hj). unfold put_at, put. destruct (Nat.eqb_spec j i) as [->|]; lra.
    + exists b. split; [apply in_or_app; now right|exact Bb].
Qed.

(* Splitting (2): what holds of f on every leaf holds on the cell: the hull of the leaves' enclosures contains its range. *)
Theorem hull_of_leaves (n : nat) (t : tree) (lo hi : vector) (f : vector -> R) (p q : R) :
  (forall b, In b (leaves t lo hi) -> forall x, box n (fst b) (snd b) x -> p <= f x <= q) -> forall x, box n lo hi x -> p <= f x <= q.
Proof. intros H x B. destruct (leaves_cover n t lo hi x B) as [b [I Bb]]. now apply (H b). Qed.

(* Corners (1): the larger of u in [p, q] and v in [r, s] lies in [max(p, r), max(q, s)], the smaller likewise; |u| is the larger of u, −u and 0. *)
Theorem corner_value (p q r s u v : R) : p <= u <= q -> r <= v <= s ->
  Rmax p r <= Rmax u v <= Rmax q s /\ Rmin p r <= Rmin u v <= Rmin q s /\ Rabs u = Rmax u (- u) /\ 0 <= Rmax u (- u).
Proof.
  intros U V. unfold Rmax, Rmin, Rabs. repeat split; repeat destruct Rle_dec; repeat destruct Rcase_abs; lra.
Qed.

(* Corners (1), (2): a branch that is not met, r > q over the box, is nowhere the larger one, so the other stands for the corner there. *)
Theorem branch_not_met (u v : vector -> R) (dom : vector -> Prop) (q r : R) : (forall x, dom x -> u x <= q /\ r <= v x) -> q < r ->
  forall x, dom x -> Rmax (u x) (v x) = v x.
Proof. intros H L x D. destruct (H x D). apply Rmax_right. lra. Qed.

(* Corners (3): at every point the corner is one of its two branches, so what encloses both encloses it. *)
Theorem some_branch (u v p q : R) : p <= u <= q -> p <= v <= q -> p <= Rmax u v <= q /\ p <= Rmin u v <= q.
Proof. intros U V. unfold Rmax, Rmin. destruct (Rle_dec u v); lra. Qed.

(** A function of degree at most one in each of n variables. *)
Definition multilinear (n : nat) (f : vector -> R) : Prop := forall x i, (i < n)%nat -> exists a b, forall z, f (put x i z) = a + z * b.

Definition corner (n : nat) (lo hi x : vector) : Prop := forall i, (i < n)%nat -> x i = lo i \/ x i = hi i.

Lemma put_same x i : put x i (x i) = x.
Proof. apply functional_extensionality. intro j. unfold put. destruct (Nat.eqb_spec j i) as [->|]; reflexivity. Qed.

(* Reading (1): over a box a function of degree at most one in each variable lies between its values at two vertices. *)
Theorem multilinear_at_vertices (n : nat) (f : vector -> R) (lo hi : vector) : multilinear n f ->
  forall x, box n lo hi x -> exists a b, corner n lo hi a /\ corner n lo hi b /\ f a <= f x <= f b.
Proof.
  intros M x B.
  assert (H : forall k, (k <= n)%nat -> exists a b, (forall i, (i < k)%nat -> a i = lo i \/ a i = hi i) /\
    (forall i, (i < k)%nat -> b i = lo i \/ b i = hi i) /\ box n lo hi a /\ box n lo hi b /\ f a <= f x <= f b).
  { induction k as [|k IH]; intro Hk; [exists x, x; repeat split; try (intros; lia); try apply B; trivial; lra|].
    destruct (IH ltac:(lia)) as [a [b [A [A' [Ba [Bb F]]]]]].
    assert (Move : forall y, box n lo hi y -> exists z z', (z = lo k \/ z = hi k) /\ (z' = lo k \/ z' = hi k) /\ f (put y k z) <= f y <= f (put y k z')).
    { intros y By. destruct (M y k ltac:(lia)) as [p [q E]]. specialize (By k ltac:(lia)).
      destruct (Rle_dec 0 q).
      - exists (lo k), (hi k). repeat split; auto; rewrite <- (put_same y k), !E; [replace (put (put y k (y k)) k (lo k)) with (put y k (lo k)) by now rewrite put_same|replace (put (put y k (y k)) k (hi k)) with (put y k (hi k)) by now rewrite put_same]; rewrite E; nra.
      - exists (hi k), (lo k). repeat split; auto; rewrite <- (put_same y k), !E; [replace (put (put y k (y k)) k (hi k)) with (put y k (hi k)) by now rewrite put_same|replace (put (put y k (y k)) k (lo k)) with (put y k (lo k)) by now rewrite put_same]; rewrite E; nra. }
    destruct (Move a Ba) as [z [_ [Z [_ [Fz _]]]]]. destruct (Move b Bb) as [_ [z' [_ [Z' [_ Fz']]]]].
    assert (P : forall y c, box n lo hi y -> (c = lo k \/ c = hi k) -> box n lo hi (put y k c)).
    { intros y c By C i Hi. unfold put. destruct (Nat.eqb_spec i k) as [->|]; [|now apply By].
      specialize (By k Hi). destruct C as [->| ->]; lra. }
    assert (V : forall y c, (forall i, (i < k)%nat -> y i = lo i \/ y i = hi i) -> (c = lo k \/ c = hi k) ->
      forall i, (i < S k)%nat -> put y k c i = lo i \/ put y k c i = hi i).
    { intros y c Vy C i Hi. unfold put. destruct (Nat.eqb_spec i k) as [->|]; [exact C|]. apply Vy; lia. }
    exists (put a k z), (put b k z'). split; [now apply V|]. split; [now apply V|].
    split; [now apply P|]. split; [now apply P|]. lra. }
  destruct (H n (le_n n)) as [a [b [A [A' [_ [_ F]]]]]]. exists a, b. auto.
Qed.

(* Reading (3): every value of [a, b] lies in a closed cell of the grid that reaches over a part of it, where a < b. *)
Theorem cells_cover (g : nat -> R) (m : nat) (a b x : R) : (forall i, (i < m)%nat -> g i < g (S i)) -> g O <= a -> b <= g m -> a < b ->
  a <= x <= b -> exists i, (i < m)%nat /\ g i <= x <= g (S i) /\ g i < b /\ a < g (S i).
Proof.
  intros Inc L H Lt X.
  assert (Q : forall k, (k <= m)%nat -> x < g k -> exists i, (i < k)%nat /\ g i <= x < g (S i)).
  { induction k as [|k IH]; intros Hk Xk; [lra|]. destruct (Rlt_dec x (g k)) as [N|N].
    - destruct (IH ltac:(lia) N) as [i [Hi B]]. exists i. split; [lia|exact B].
    - exists k. split; [lia|lra]. }
  destruct (Rlt_dec x b) as [N|N].
  - destruct (Q m (le_n m) ltac:(lra)) as [i [Hi B]]. exists i. repeat split; try lia; lra.
  - (* x = b: the cell that ends at or after b and begins before it *)
    assert (Q' : forall k, (k <= m)%nat -> x <= g k -> exists i, (i < k)%nat /\ g i < x <= g (S i)).
    { induction k as [|k IH]; intros Hk Xk; [lra|]. destruct (Rle_dec x (g k)) as [P|P].
      - destruct (IH ltac:(lia) P) as [i [Hi B]]. exists i. split; [lia|exact B].
      - exists k. split; [lia|lra]. }
    destruct (Q' m (le_n m) ltac:(lra)) as [i [Hi B]]. exists i. repeat split; try lia; lra.
Qed.

(* Matrix (6): over a leaf an entry Σ_l t_l g_l + d + c, |t_l| <= 1 and |d| <= r, lies within Σ |g_l| + r of c. *)
Theorem entry_over_leaf (k : nat) (t g : vector) (c d r : R) : in_cube k t -> Rabs d <= r ->
  Rabs (c + sum k (fun l => t l * g l) + d - c) <= sum k (fun l => Rabs (g l)) + r.
Proof.
  intros C D. replace (c + sum k (fun l => t l * g l) + d - c) with (sum k (fun l => t l * g l) + d) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. apply Rplus_le_compat; trivial. eapply Rle_trans; [apply sum_abs|].
  apply sum_le. intros l Hl. rewrite Rabs_mult. specialize (C l Hl).
  assert (Rabs (t l) <= 1) by (apply Rabs_le_between; lra). assert (P := Rabs_pos (g l)). nra.
Qed.

(* Reading (2): by variable i a function of degree at most one has everywhere the slope (f at hi − f at lo)/(hi − lo). *)
Theorem slope_of_reading (n : nat) (f : vector -> R) (i : nat) (x : vector) (lo hi : R) : multilinear n f -> (i < n)%nat -> lo < hi ->
  is_derive (fun z => f (put x i z)) (x i) ((f (put x i hi) - f (put x i lo)) / (hi - lo)).
Proof.
  intros M Hi L. destruct (M x i Hi) as [a [b E]]. rewrite !E.
  apply (is_derive_ext (fun z => a + z * b)); [intro; now rewrite E|].
  replace ((a + hi * b - (a + lo * b)) / (hi - lo)) with b by (field; lra). auto_derive; [exact I|ring].
Qed.
