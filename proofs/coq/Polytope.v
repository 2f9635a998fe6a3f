(** Polytopes that every trajectory is drawn into: proofs/polytope.md. *)
Require Import Reals Lra Lia FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Comparison Several.
Open Scope R_scope.

Definition plus_ (x y : vector) : vector := fun i => x i + y i.

(** α_i <= (V e)_i <= β_i for every row. *)
Definition in_polytope (n m : nat) (v : matrix) (alpha beta e : vector) : Prop := forall i, (i < m)%nat -> alpha i <= times n v e i <= beta i.

(** Convex combinations of the points q_0, …, q_{N−1}. *)
Definition in_hull (N : nat) (q : nat -> vector) (p : vector) : Prop := exists weight : nat -> R,
  (forall a, (a < N)%nat -> 0 <= weight a) /\ sum N weight = 1 /\ p = fun i => sum N (fun a => weight a * q a i).

Lemma hull_between N (weight f : nat -> R) lo hi : (forall a, (a < N)%nat -> 0 <= weight a) -> sum N weight = 1 ->
  (forall a, (a < N)%nat -> lo <= f a <= hi) -> lo <= sum N (fun a => weight a * f a) <= hi.
Proof.
  intros P S B. split.
  - replace lo with (sum N (fun a => weight a * lo)) by (rewrite sum_scale_r, S; ring). apply sum_le. intros a Ha. apply Rmult_le_compat_l; [now apply P|now apply B].
  - replace hi with (sum N (fun a => weight a * hi)) by (rewrite sum_scale_r, S; ring). apply sum_le. intros a Ha. apply Rmult_le_compat_l; [now apply P|now apply B].
Qed.

Lemma times_hull n N v (weight : nat -> R) (q : nat -> vector) i :
  times n v (fun j => sum N (fun a => weight a * q a j)) i = sum N (fun a => weight a * times n v (q a) i).
Proof.
  unfold times. rewrite (sum_ext n _ (fun j => sum N (fun a => weight a * (v i j * q a j)))) by (intros; rewrite <- sum_scale; apply sum_ext; intros; ring).
  rewrite sum_swap. apply sum_ext. intros a _. now rewrite sum_scale.
Qed.

(* (2), first half: if α + δ <= V(J q + m) <= β − δ at every vertex q, for every J on the way and m at the same h and w, P is mapped into itself. *)
Theorem polytope_kept (n m N : nat) (v : matrix) (alpha beta delta : vector) (q : nat -> vector) (f : vector -> vector) (js : matrix -> Prop) (target target' p : vector) :
  (forall j, js j -> forall a i, (a < N)%nat -> (i < m)%nat ->
     alpha i + delta i <= times n v (fun b => times n j (q a) b + subtract (f target) target b) i <= beta i - delta i) ->
  in_hull N q p -> jacobians n f js (plus_ target p) target -> (forall i, (i < m)%nat -> Rabs (times n v (subtract target target') i) <= delta i) ->
  in_polytope n m v alpha beta (subtract (f (plus_ target p)) target').
Proof.
  intros B [weight [Pw [S Ep]]] J D i Hi.
  assert (E : subtract (plus_ target p) target = p) by (apply functional_extensionality; intro; unfold subtract, plus_; ring).
  set (miss := times n v (subtract (f target) target) i).
  assert (A : forall j, js j -> alpha i + delta i - miss <= dot n (v i) (times n j (subtract (plus_ target p) target)) <= beta i - delta i - miss).
  { intros j Hj. rewrite E. change (dot n (v i) (times n j p)) with (times n v (times n j p) i). rewrite Ep.
    assert (T : times n v (times n j (fun b => sum N (fun a => weight a * q a b))) i = sum N (fun a => weight a * times n v (times n j (q a)) i)).
    { rewrite <- times_hull. apply times_ext. intros b _. apply times_hull. }
    rewrite T. apply hull_between; trivial. intros a Ha. specialize (B j Hj a i Ha Hi).
    replace (times n v (fun b => times n j (q a) b + subtract (f target) target b) i) with (times n v (times n j (q a)) i + miss) in B.
    - lra.
    - unfold miss, times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  assert (G := along n f js (plus_ target p) target (v i) _ _ J A). change (dot n (v i) (subtract (f (plus_ target p)) (f target))) with (times n v (subtract (f (plus_ target p)) (f target)) i) in G.
  specialize (D i Hi). apply Rabs_ends in D.
  replace (times n v (subtract (f (plus_ target p)) target') i) with
    (times n v (subtract (f (plus_ target p)) (f target)) i + miss + times n v (subtract target target') i) by (unfold miss; rewrite !times_minus; ring).
  lra.
Qed.

(* (2), second half: if P is mapped into itself and F contracts by k < 1 over a set C that holds P about every target and in which trajectories end up, the distance from e_n to P falls to 0, uniformly. *)
Theorem drawn_into {W H : Type} (F : vector -> W -> H -> vector) inW moves target (nm : vector -> R) (s c : set (state_error F inW moves target O)) (P : vector -> Prop) (k D : R) :
  0 <= k < 1 -> ends_in _ s c -> (exists p, P p) -> (forall p h, P p -> c (plus_ (target h) p) h) ->
  (forall x y w h, c x h -> c y h -> inW w -> nm (subtract (F x w h) (F y w h)) <= k * nm (subtract x y)) ->
  (forall p w h h', P p -> inW w -> moves h h' -> P (subtract (F (plus_ (target h) p) w h) (target h'))) ->
  (forall x y h, c x h -> c y h -> nm (subtract x y) <= D) ->
  forall delta, 0 < delta -> exists N, forall x h, trajectory (state_error F inW moves target O) x h -> s (x O) (h O) ->
  forall t, (N <= t)%nat -> exists p, P p /\ nm (subtract (subtract (x t) (target (h t))) p) <= delta.
Proof.
  intros Hk [N0 En] [p0 Hp0] Pc Con Kp Bd delta Hd.
  destruct (pow_lt_1_zero k ltac:(rewrite Rabs_pos_eq; lra) (delta / (Rabs D + 1))) as [N1 HN].
  { apply Rdiv_lt_0_compat; trivial. generalize (Rabs_pos D); lra. }
  exists (N0 + N1)%nat. intros x h T S0.
  assert (In : forall t, (N0 <= t)%nat -> c (x t) (h t)) by (intros; now apply En).
  assert (Same : forall t p, subtract (subtract (x t) (target (h t))) p = subtract (x t) (plus_ (target (h t)) p)).
  { intros t p. apply functional_extensionality. intro i. unfold subtract, plus_. ring. }
  assert (Fall : forall q, exists p, P p /\ nm (subtract (subtract (x (N0 + q)%nat) (target (h (N0 + q)%nat))) p) <= k ^ q * (Rabs D + 1)).
  { induction q as [|q [p [Pp Np]]].
    - exists p0. split; [exact Hp0|]. rewrite Nat.add_0_r, pow_O, Rmult_1_l, Same.
      assert (B := Bd (x N0) (plus_ (target (h N0)) p0) (h N0) (In N0 (le_n N0)) (Pc p0 (h N0) Hp0)). generalize (Rle_abs D); lra.
    - replace (N0 + S q)%nat with (S (N0 + q)) by lia. destruct (T (N0 + q)%nat) as [Mv [w [Iw Ex]]]. cbn in Mv, Iw, Ex.
      exists (subtract (F (plus_ (target (h (N0 + q)%nat)) p) w (h (N0 + q)%nat)) (target (h (S (N0 + q))))). split; [now apply Kp|].
      rewrite Ex. replace (subtract (subtract (F (x (N0 + q)%nat) w (h (N0 + q)%nat)) (target (h (S (N0 + q)))))
          (subtract (F (plus_ (target (h (N0 + q)%nat)) p) w (h (N0 + q)%nat)) (target (h (S (N0 + q))))))
        with (subtract (F (x (N0 + q)%nat) w (h (N0 + q)%nat)) (F (plus_ (target (h (N0 + q)%nat)) p) w (h (N0 + q)%nat))).
      + eapply Rle_trans; [apply Con; [apply In; lia|now apply Pc|exact Iw]|]. rewrite <- Same. cbn [pow]. rewrite Rmult_assoc. apply Rmult_le_compat_l; lra.
      + apply functional_extensionality. intro i. unfold subtract. ring. }
  intros t Ht. destruct (Fall (t - N0)%nat) as [p [Pp Np]]. replace (N0 + (t - N0))%nat with t in Np by lia.
  exists p. split; [exact Pp|]. eapply Rle_trans; [exact Np|]. specialize (HN (t - N0)%nat ltac:(lia)). rewrite Rabs_pos_eq in HN by (apply pow_le; lra).
  assert (Q : 0 < Rabs D + 1) by (generalize (Rabs_pos D); lra). apply (Rmult_lt_compat_r (Rabs D + 1)) in HN; trivial.
  replace (delta / (Rabs D + 1) * (Rabs D + 1)) with delta in HN by (field; lra). lra.
Qed.

(* (2): so |e_s| stays below any number above the largest |q_s| of a vertex in the end. *)
Theorem state_drawn {W H : Type} (F : vector -> W -> H -> vector) inW moves target (nm : vector -> R) (s : set (state_error F inW moves target O)) (P : vector -> Prop)
  (N : nat) (q : nat -> vector) (i : nat) (sigma top : R) : 0 <= sigma -> (forall e, Rabs (e i) <= sigma * nm e) ->
  (forall p, P p -> in_hull N q p) -> (forall a, (a < N)%nat -> Rabs (q a i) <= top) ->
  (forall delta, 0 < delta -> exists M, forall x h, trajectory (state_error F inW moves target O) x h -> s (x O) (h O) ->
     forall t, (M <= t)%nat -> exists p, P p /\ nm (subtract (subtract (x t) (target (h t))) p) <= delta) ->
  ultimate (state_error F inW moves target i) s top.
Proof.
  intros Hs Pr Hu Tp Dr b Hb. set (g := (b - top) / (2 * (sigma + 1))).
  assert (Hg : 0 < g) by (unfold g; apply Rdiv_lt_0_compat; lra).
  destruct (Dr g Hg) as [M HM]. exists M. intros x h T S0 t Ht. destruct (HM x h T S0 t Ht) as [p [Pp Np]].
  assert (Bp : Rabs (p i) <= top).
  { destruct (Hu p Pp) as [weight [Pw [S ->]]]. apply Rabs_le. apply hull_between; trivial. intros a Ha. apply Rabs_ends, Tp, Ha. }
  specialize (Pr (subtract (subtract (x t) (target (h t))) p)). apply (Rmult_le_compat_l sigma) in Np; trivial. unfold subtract in Pr at 1 2. cbn.
  assert (Sg : sigma * g < b - top).
  { unfold g. apply (Rmult_lt_reg_r (2 * (sigma + 1))); [lra|]. replace (sigma * ((b - top) / (2 * (sigma + 1))) * (2 * (sigma + 1))) with (sigma * (b - top)) by (field; lra). nra. }
  revert Pr Bp. unfold Rabs. repeat destruct (Rcase_abs _); lra.
Qed.

(* (3b): for positive p with K p <= k p, a comparison by K contracts the norm max |y_i|/p_i by k. *)
Theorem comparison_contracts (m : nat) (K : matrix) (p y z : vector) (k r : R) : (forall i j, 0 <= K i j) -> (forall i, (i < m)%nat -> 0 < p i) ->
  (forall i, (i < m)%nat -> times m K p i <= k * p i) -> 0 <= r -> (forall i, (i < m)%nat -> Rabs (z i) <= times m K (fun j => Rabs (y j)) i) ->
  (forall i, (i < m)%nat -> Rabs (y i) <= r * p i) -> forall i, (i < m)%nat -> Rabs (z i) <= k * r * p i.
Proof.
  intros HK Pp Hp Hr Z Y i Hi. eapply Rle_trans; [now apply Z|]. apply Rle_trans with (r * times m K p i).
  - unfold times. rewrite <- sum_scale. apply sum_le. intros j Hj. specialize (Y j Hj). specialize (HK i j). nra.
  - specialize (Hp i Hi). nra.
Qed.

(* Without contraction nothing is drawn in: x⁺ = x keeps P = {0}, and errors stay as they are. *)
Example kept_is_not_drawn_into (x : R) : x <> 0 -> forall n, iterate (fun y => y) x n = x.
Proof. intros _ n. induction n as [|n IH]; [reflexivity|]. exact IH. Qed.
