(** The norm over a leaf from one ellipsoid to another, by a matrix inequality: proofs/matrix.md (2e). *)
Require Import Reals Lra Lia List FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Leaves.
Open Scope R_scope.

(** x led by A and seen along y. *)
Definition seen_along (n c : nat) (a : matrix) (x y : vector) : R := dot n y (times c a x).

Lemma seen_along_put d n c m g t l x y : (l < d)%nat ->
  exists p q, forall z, seen_along n c (affine d m g (put t l z)) x y = p + z * q.
Proof.
  intro Hl. unfold seen_along, dot. induction n as [|n [p [q E]]]; [exists 0, 0; intros; cbn; ring|].
  destruct (affine_times d c m g t l x n Hl) as [p' [q' E']]. exists (p + y n * p'), (q + y n * q').
  intro z. cbn. rewrite E, E'. ring.
Qed.

Lemma seen_along_largest d n c m g x y t : in_cube d t ->
  exists s, vertex d s /\ seen_along n c (affine d m g t) x y <= seen_along n c (affine d m g s) x y.
Proof.
  intro C. assert (L : least_inside d (fun t => seen_along n c (affine d m g t) x y)).
  { intros u l Hl Cu. cbv beta.
    assert (E : put u l (u l) = u).
    { apply functional_extensionality. intro i. unfold put. destruct (Nat.eqb_spec i l) as [->|]; reflexivity. }
    destruct (seen_along_put d n c m g u l x y Hl) as [p [q P]]. specialize (Cu l Hl). rewrite <- E at 1. rewrite !P.
    assert (G1 := Rmax_l (p + -1 * q) (p + 1 * q)). assert (G2 := Rmax_r (p + -1 * q) (p + 1 * q)). nra. }
  destruct (vertex_bound d _ L t C) as [s [V [_ B]]]. now exists s.
Qed.

(** What a rest may add, shared between x and y by the scales. *)
Lemma rest_shared n c (r e : matrix) (xi eta x y : vector) :
  (forall j, (j < c)%nat -> 0 < xi j) -> (forall i, (i < n)%nat -> 0 < eta i) ->
  (forall i j, (i < n)%nat -> (j < c)%nat -> Rabs (e i j) <= r i j) ->
  2 * seen_along n c e x y <= sum c (fun j => sum n (fun i => r i j * eta i) / xi j * (x j * x j))
    + sum n (fun i => sum c (fun j => r i j * xi j) / eta i * (y i * y i)).
Proof.
  intros X Y E.
  rewrite (sum_ext c _ (fun j => sum n (fun i => r i j * eta i / xi j * (x j * x j)))).
  2:{ intros j Hj. specialize (X j Hj). unfold Rdiv. rewrite <- !sum_scale_r. apply sum_ext; intros; ring. }
  rewrite sum_swap, <- sum_plus. unfold seen_along, dot. rewrite <- sum_scale. apply sum_le. intros i Hi.
  rewrite (Rmult_comm (_ / _)). unfold Rdiv. rewrite <- sum_scale_r, <- sum_scale, <- sum_plus.
  unfold times. rewrite <- !sum_scale. apply sum_le. intros j Hj.
  specialize (X j Hj). specialize (Y i Hi). specialize (E i j Hi Hj).
  assert (A : y i * (e i j * x j) <= r i j * (Rabs (x j) * Rabs (y i))).
  { eapply Rle_trans; [apply Rle_abs|]. rewrite !Rabs_mult.
    replace (Rabs (y i) * (Rabs (e i j) * Rabs (x j))) with (Rabs (e i j) * (Rabs (x j) * Rabs (y i))) by ring.
    apply Rmult_le_compat_r; trivial. apply Rmult_le_pos; apply Rabs_pos. }
  assert (R0 : 0 <= r i j) by (eapply Rle_trans; [apply Rabs_pos|exact E]).
  (* 2|x||y| <= (eta/xi) x² + (xi/eta) y² *)
  assert (S : 2 * (Rabs (x j) * Rabs (y i)) <= eta i * / xi j * (x j * x j) + xi j * / eta i * (y i * y i)).
  { assert (X2 : x j * x j = Rabs (x j) * Rabs (x j)) by (rewrite <- Rabs_mult, Rabs_pos_eq; nra).
    assert (Y2 : y i * y i = Rabs (y i) * Rabs (y i)) by (rewrite <- Rabs_mult, Rabs_pos_eq; nra). rewrite X2, Y2.
    assert (Q := Rle_0_sqr (eta i * Rabs (x j) - xi j * Rabs (y i))). unfold Rsqr in Q.
    apply (Rmult_le_reg_l (eta i * xi j)); [apply Rmult_lt_0_compat; trivial|].
    replace (eta i * xi j * (eta i * / xi j * (Rabs (x j) * Rabs (x j)) + xi j * / eta i * (Rabs (y i) * Rabs (y i))))
      with (eta i * Rabs (x j) * (eta i * Rabs (x j)) + xi j * Rabs (y i) * (xi j * Rabs (y i))) by (field; lra).
    nra. }
  assert (M := Rmult_le_compat_l _ _ _ R0 S). nra.
Qed.

(* (2e) If at every vertex 2 yᵀB x is at most k(xᵀP x + yᵀQ y) less Σ b_j x_j² and Σ a_i y_i², b = rᵀη/ξ and a = r ξ/η, then on the leaf 2 yᵀ(B(t) + D)x <= k(xᵀP x + yᵀQ y). *)
Theorem inequality_over_leaf (d n c : nat) (p q m r : matrix) (g : nat -> matrix) (xi eta : vector) (k : R) :
  (forall j, (j < c)%nat -> 0 < xi j) -> (forall i, (i < n)%nat -> 0 < eta i) ->
  (forall s, vertex d s -> forall x y, 2 * seen_along n c (affine d m g s) x y <=
    k * (form c p x x + form n q y y) - sum c (fun j => sum n (fun i => r i j * eta i) / xi j * (x j * x j))
      - sum n (fun i => sum c (fun j => r i j * xi j) / eta i * (y i * y i))) ->
  forall t e x y, in_cube d t -> (forall i j, (i < n)%nat -> (j < c)%nat -> Rabs (e i j) <= r i j) ->
  2 * seen_along n c (fun i j => affine d m g t i j + e i j) x y <= k * (form c p x x + form n q y y).
Proof.
  intros X Y H t e x y C E.
  assert (S : seen_along n c (fun i j => affine d m g t i j + e i j) x y = seen_along n c (affine d m g t) x y + seen_along n c e x y).
  { unfold seen_along, dot. rewrite <- sum_plus. apply sum_ext. intros i _. rewrite <- Rmult_plus_distr_l. f_equal.
    unfold times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  destruct (seen_along_largest d n c m g x y t C) as [s [V B]]. specialize (H s V x y).
  assert (D := rest_shared n c r e xi eta x y X Y E). rewrite S. lra.
Qed.

(* (2e) With xᵀP x = |W x|², yᵀQ y = |Lᵀy|² and V L = 1, that 2 yᵀA x <= k(xᵀP x + yᵀQ y) for all x and y is |V A x| <= k|W x|. *)
Theorem inequality_is_norm (n c m : nat) (v l w a : matrix) (k : R) : 0 <= k -> left_inverse n n v l ->
  (forall x y, 2 * seen_along n c a x y <= k * (dot m (times c w x) (times c w x) + dot n (times n (fun i j => l j i) y) (times n (fun i j => l j i) y))) ->
  forall x, euclidean n (times n v (times c a x)) <= k * euclidean m (times c w x).
Proof.
  intros Hk I H x. set (u := times n v (times c a x)). set (b := dot n u u). set (f := dot m (times c w x) (times c w x)).
  assert (B0 : 0 <= b) by apply dot_pos. assert (F0 : 0 <= f) by apply dot_pos.
  (* y a multiple of Vᵀu *)
  assert (Q : forall s, 2 * (s * b) <= k * (f + s * s * b)).
  { intro s. set (y := fun i => s * times n (fun i j => v j i) u i). specialize (H x y).
    assert (E1 : seen_along n c a x y = s * b).
    { unfold seen_along, y, b, dot. rewrite (sum_ext n _ (fun i => s * (times n (fun i j => v j i) u i * times c a x i))) by (intros; ring).
      rewrite sum_scale. f_equal. change (sum n (fun i => sum n (fun j => v j i * u j) * times c a x i) = sum n (fun j => u j * u j)).
      rewrite (sum_ext n _ (fun i => sum n (fun j => u j * (v j i * times c a x i)))) by (intros; rewrite <- sum_scale_r; apply sum_ext; intros; ring).
      rewrite sum_swap. apply sum_ext. intros j _. rewrite sum_scale. reflexivity. }
    assert (E2 : dot n (times n (fun i j => l j i) y) (times n (fun i j => l j i) y) = s * s * b).
    { assert (T : forall i, (i < n)%nat -> times n (fun i j => l j i) y i = s * u i).
      { intros i Hi. unfold y. unfold times at 1. rewrite (sum_ext n _ (fun j => s * (l j i * times n (fun i j => v j i) u j))) by (intros; ring).
        rewrite sum_scale. f_equal. unfold times.
        rewrite (sum_ext n _ (fun j => sum n (fun h => u h * (v h j * l j i)))) by (intros; rewrite <- sum_scale; apply sum_ext; intros; ring).
        rewrite sum_swap. rewrite (sum_single n _ i Hi).
        - rewrite sum_scale. change (sum n (fun j => v i j * l j i)) with (product n v l i i). rewrite I, Nat.eqb_refl by trivial. ring.
        - intros h Hh N. rewrite sum_scale. change (sum n (fun j => v h j * l j i)) with (product n v l h i).
          rewrite I by trivial. apply Nat.eqb_neq in N. rewrite N. ring. }
      unfold b, dot. rewrite <- sum_scale. apply sum_ext. intros i Hi. rewrite T by trivial. ring. }
    rewrite E1, E2 in H. exact H. }
  assert (D : b * b <= k * f * (k * b)).
  { apply discriminant; [|now apply Rmult_le_pos]. intro s. specialize (Q s). lra. }
  unfold euclidean. fold b f. replace k with (sqrt (k * k)) by now apply sqrt_square.
  rewrite <- sqrt_mult by (trivial; nra). apply sqrt_le_1_alt.
  destruct (Req_dec b 0) as [->|N]; [nra|]. apply (Rmult_le_reg_l b); [lra|]. nra.
Qed.
