(** Norms over leaves, matrix inequalities, definiteness by elimination: proofs/matrix.md (1d), (2), (3), (4). *)
Require Import Reals Lra Lia List FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms.
Open Scope R_scope.

(** t with coordinate l put at a. *)
Definition put (t : vector) (l : nat) (a : R) : vector := fun i => if Nat.eqb i l then a else t i.

Definition in_cube (d : nat) (t : vector) : Prop := forall l, (l < d)%nat -> -1 <= t l <= 1.
Definition vertex (d : nat) (t : vector) : Prop := forall l, (l < d)%nat -> t l = -1 \/ t l = 1.

(** Along every coordinate, no larger inside than at the larger of the two ends: convex functions are. *)
Definition least_inside (d : nat) (f : vector -> R) : Prop := forall t l, (l < d)%nat -> in_cube d t ->
  f t <= Rmax (f (put t l (-1))) (f (put t l 1)).

Lemma put_cube d t l a : in_cube d t -> -1 <= a <= 1 -> in_cube d (put t l a).
Proof. intros C A i Hi. unfold put. destruct (Nat.eqb i l); auto. Qed.

(* (1d), (2): over a cube a function that is convex in every coordinate is nowhere larger than at some vertex. *)
Theorem vertex_bound (d : nat) (f : vector -> R) : least_inside d f -> forall t, in_cube d t ->
  exists s, vertex d s /\ in_cube d s /\ f t <= f s.
Proof.
  intros L t C.
  assert (H : forall k, (k <= d)%nat -> exists s, (forall l, (l < k)%nat -> s l = -1 \/ s l = 1) /\ in_cube d s /\ f t <= f s).
  { induction k as [|k IH]; intro Hk; [exists t; split; [intros; lia|split; [exact C|lra]]|].
    destruct (IH ltac:(lia)) as [s [V [Cs F]]]. assert (Q := L s k ltac:(lia) Cs).
    unfold Rmax in Q. destruct (Rle_dec (f (put s k (-1))) (f (put s k 1))).
    - exists (put s k 1). split; [|split; [apply put_cube; trivial; lra|lra]].
      intros l Hl. unfold put. destruct (Nat.eqb l k) eqn:E; [lra|]. apply Nat.eqb_neq in E. apply V; lia.
    - exists (put s k (-1)). split; [|split; [apply put_cube; trivial; lra|lra]].
      intros l Hl. unfold put. destruct (Nat.eqb l k) eqn:E; [lra|]. apply Nat.eqb_neq in E. apply V; lia. }
  destruct (H d (le_n d)) as [s [V [Cs F]]]. now exists s.
Qed.

(** A length of an affine function of t is convex in every coordinate. *)
Lemma affine_least_inside d m len (a : vector -> vector) : supported m len ->
  (forall t l i, (l < d)%nat -> (i < m)%nat -> exists p q, forall z, a (put t l z) i = p + z * q) ->
  least_inside d (fun t => len (a t)).
Proof.
  intros [_ S] A t l Hl C. destruct (S (a t)) as [c [<- H]].
  assert (E : put t l (t l) = t).
  { apply functional_extensionality. intro i. unfold put. destruct (Nat.eqb_spec i l) as [->|]; reflexivity. }
  assert (M : exists p q, forall z, dot m c (a (put t l z)) = p + z * q).
  { clear H. unfold dot. induction m as [|k IH]; [exists 0, 0; intros; cbn; ring|].
    destruct (A t l k Hl (Nat.lt_succ_diag_r k)) as [p [q E1]].
    assert (I : exists p q, forall z, sum k (fun i => c i * a (put t l z) i) = p + z * q).
    { clear -A Hl. induction k as [|k IH]; [exists 0, 0; intros; cbn; ring|].
      destruct IH as [p [q E]]; [intros; apply A; trivial; lia|].
      destruct (A t l k Hl ltac:(lia)) as [p' [q' E']]. exists (p + c k * p'), (q + c k * q').
      intro z. cbn. rewrite E, E'. ring. }
    destruct I as [p' [q' E2]]. exists (p' + c k * p), (q' + c k * q). intro z. cbn. rewrite E2, E1. ring. }
  destruct M as [p [q M]]. assert (H1 := H (a (put t l (-1)))). assert (H2 := H (a (put t l 1))).
  rewrite M in H1, H2. rewrite <- E at 1. rewrite M. specialize (C l Hl).
  apply Rabs_ends in H1. apply Rabs_ends in H2.
  assert (G1 := Rmax_l (len (a (put t l (-1)))) (len (a (put t l 1)))).
  assert (G2 := Rmax_r (len (a (put t l (-1)))) (len (a (put t l 1)))). nra.
Qed.

(** A leaf: A = C + Σ_l t_l G_l + D, t in the cube, |D| <= ρ entry by entry; B(t) its affine part, seen in coordinates. *)
Definition affine (d : nat) (c : matrix) (g : nat -> matrix) (t : vector) : matrix :=
  fun i j => c i j + sum d (fun l => t l * g l i j).

Lemma affine_put d c g t l i j : (l < d)%nat ->
  exists p q, forall z, affine d c g (put t l z) i j = p + z * q.
Proof.
  intro Hl. unfold affine.
  assert (H : exists p q, forall z, sum d (fun k => put t l z k * g k i j) = p + z * q).
  { clear Hl. induction d as [|d [p [q E]]]; [exists 0, 0; intros; cbn; ring|].
    destruct (Nat.eqb d l) eqn:N; [exists p, (q + g d i j)|exists (p + t d * g d i j), q]; intro z; cbn; rewrite E; unfold put; rewrite N; ring. }
  destruct H as [p [q E]]. exists (c i j + p), q. intro z. rewrite E. ring.
Qed.

Lemma affine_times d n c g t l y i : (l < d)%nat ->
  exists p q, forall z, times n (affine d c g (put t l z)) y i = p + z * q.
Proof.
  intro Hl. unfold times. induction n as [|n [p [q E]]]; [exists 0, 0; intros; cbn; ring|].
  destruct (affine_put d c g t l i n Hl) as [p' [q' E']]. exists (p + p' * y n), (q + q' * y n).
  intro z. cbn. rewrite E, E'. ring.
Qed.

Lemma abs_mean a b x y : 0 <= a -> 0 <= b -> Rabs (a * x + b * y) <= a * Rabs x + b * Rabs y.
Proof.
  intros A B. eapply Rle_trans; [apply Rabs_triang|]. rewrite !Rabs_mult, (Rabs_pos_eq a), (Rabs_pos_eq b) by trivial. lra.
Qed.

(* (2a) Box, polytope: if at every vertex each row has Σ_j |B_ij| + Σ_j R_ij <= k, then |(B(t) + D) y| <= k|y| on the leaf. *)
Theorem rows_over_leaf (d m n : nat) (c r : matrix) (g : nat -> matrix) (k : R) : 0 <= k ->
  (forall s i, vertex d s -> (i < m)%nat -> sum n (fun j => Rabs (affine d c g s i j)) + sum n (fun j => r i j) <= k) ->
  forall t e y, in_cube d t -> (forall i j, (i < m)%nat -> (j < n)%nat -> Rabs (e i j) <= r i j) ->
  largest m (times n (fun i j => affine d c g t i j + e i j) y) <= k * largest n y.
Proof.
  intros Hk K t e y C E. apply largest_le; [apply Rmult_le_pos; trivial; apply largest_pos|]. intros i Hi.
  (* the row sum of magnitudes, over the cube *)
  assert (L : least_inside d (fun t => sum n (fun j => Rabs (affine d c g t i j)))).
  { intros u l Hl Cu. cbv beta.
    assert (E' : put u l (u l) = u).
    { apply functional_extensionality. intro x. unfold put. destruct (Nat.eqb_spec x l) as [->|]; reflexivity. }
    specialize (Cu l Hl).
    assert (Q : sum n (fun j => Rabs (affine d c g u i j)) <=
      (1 - u l) / 2 * sum n (fun j => Rabs (affine d c g (put u l (-1)) i j)) + (1 + u l) / 2 * sum n (fun j => Rabs (affine d c g (put u l 1) i j))).
    { rewrite <- !sum_scale, <- sum_plus. apply sum_le. intros j _. destruct (affine_put d c g u l i j Hl) as [p [q A]].
      rewrite <- E' at 1. rewrite !A.
      replace (p + u l * q) with ((1 - u l) / 2 * (p + -1 * q) + (1 + u l) / 2 * (p + 1 * q)) by field.
      apply abs_mean; lra. }
    assert (G1 := Rmax_l (sum n (fun j => Rabs (affine d c g (put u l (-1)) i j))) (sum n (fun j => Rabs (affine d c g (put u l 1) i j)))).
    assert (G2 := Rmax_r (sum n (fun j => Rabs (affine d c g (put u l (-1)) i j))) (sum n (fun j => Rabs (affine d c g (put u l 1) i j)))).
    nra. }
  destruct (vertex_bound d _ L t C) as [s [V [_ B]]]. specialize (K s i V Hi).
  eapply Rle_trans; [apply sum_abs|].
  apply Rle_trans with (sum n (fun j => (Rabs (affine d c g t i j) + r i j) * largest n y)).
  - apply sum_le. intros j Hj. rewrite Rabs_mult.
    apply Rmult_le_compat; [apply Rabs_pos|apply Rabs_pos| |now apply largest_ge].
    eapply Rle_trans; [apply Rabs_triang|]. specialize (E i j Hi Hj). lra.
  - rewrite sum_scale_r. apply Rmult_le_compat_r; [apply largest_pos|].
    rewrite (sum_plus n (fun j => Rabs (affine d c g t i j)) (fun j => r i j)). cbv beta in B. lra.
Qed.

(* (2b) Ellipsoid: if at every vertex |B y| <= k|y|, and delta² >= Σ R_ij² (the trace of RᵀR), then |(B(t) + D) y| <= (k + delta)|y|. *)
Theorem length_over_leaf (d m n : nat) (c r : matrix) (g : nat -> matrix) (k delta : R) : 0 <= delta ->
  (forall s, vertex d s -> forall y, euclidean m (times n (affine d c g s) y) <= k * euclidean n y) ->
  sum m (fun i => sum n (fun j => r i j * r i j)) <= delta * delta ->
  forall t e y, in_cube d t -> (forall i j, (i < m)%nat -> (j < n)%nat -> Rabs (e i j) <= r i j) ->
  euclidean m (times n (fun i j => affine d c g t i j + e i j) y) <= (k + delta) * euclidean n y.
Proof.
  intros Hd K Tr t e y C E. assert (S := euclidean_supported m).
  rewrite (supported_ext m _ _ (fun i => times n (affine d c g t) y i + times n e y i) S).
  2:{ intros i _. unfold times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  eapply Rle_trans; [apply (supported_triangle m); exact S|]. rewrite Rmult_plus_distr_r. apply Rplus_le_compat.
  - assert (L := affine_least_inside d m (euclidean m) (fun t => times n (affine d c g t) y) S
      ltac:(intros; now apply affine_times)).
    destruct (vertex_bound d _ L t C) as [s [V [_ B]]]. eapply Rle_trans; [exact B|now apply K].
  - unfold euclidean at 1. apply Rle_trans with (sqrt (delta * delta * dot n y y)).
    + apply sqrt_le_1_alt. apply Rle_trans with (sum m (fun i => sum n (fun j => r i j * r i j) * dot n y y)).
      * apply sum_le. intros i Hi. assert (Q := cauchy n (fun j => e i j) y).
        assert (Q' : dot n (fun j => e i j) (fun j => e i j) <= sum n (fun j => r i j * r i j)).
        { apply sum_le. intros j Hj. specialize (E i j Hi Hj). rewrite <- (Rabs_pos_eq (e i j * e i j)), Rabs_mult by nra.
          apply Rmult_le_compat; trivial; apply Rabs_pos. }
        assert (P := dot_pos n y). change (times n e y i) with (dot n (fun j => e i j) y). nra.
      * rewrite sum_scale_r. apply Rmult_le_compat_r; [apply dot_pos|exact Tr].
    + rewrite sqrt_mult by (try apply dot_pos; nra). rewrite sqrt_square by trivial. unfold euclidean. lra.
Qed.

(* (2b), the other way to delta: no row of M = RᵀR >= 0 has a sum above delta². *)
Theorem spread_by_rows (m n : nat) (r e : matrix) (delta : R) : 0 <= delta ->
  (forall i j, (i < m)%nat -> (j < n)%nat -> Rabs (e i j) <= r i j) ->
  (forall j, (j < n)%nat -> sum n (fun k => sum m (fun i => r i j * r i k)) <= delta * delta) ->
  forall y, euclidean m (times n e y) <= delta * euclidean n y.
Proof.
  intros Hd E M y. unfold euclidean. replace delta with (sqrt (delta * delta)) by now apply sqrt_square.
  rewrite <- sqrt_mult by (try apply dot_pos; nra). apply sqrt_le_1_alt.
  set (z := fun j => Rabs (y j)).
  assert (R0 : forall i j, (i < m)%nat -> (j < n)%nat -> 0 <= r i j) by (intros i j Hi Hj; eapply Rle_trans; [apply Rabs_pos|now apply E]).
  apply Rle_trans with (sum m (fun i => sum n (fun j => sum n (fun k => r i j * r i k * ((z j * z j + z k * z k) / 2))))).
  - apply sum_le. intros i Hi.
    assert (A : Rabs (times n e y i) <= times n r z i).
    { apply times_near; [intros j Hj; now apply E|intros; apply Rle_refl]. }
    apply Rle_trans with (times n r z i * times n r z i).
    { rewrite <- (Rabs_pos_eq (_ * _)), Rabs_mult by nra. apply Rmult_le_compat; trivial; apply Rabs_pos. }
    unfold times at 1. rewrite <- sum_scale_r. apply sum_le. intros j Hj.
    unfold times. rewrite <- sum_scale. apply sum_le. intros k Hk.
    assert (0 <= r i j * r i k) by (apply Rmult_le_pos; auto).
    assert (Q := Rmult_le_pos _ _ H (Rle_0_sqr (z j - z k))). unfold Rsqr in Q. clearbody z. lra.
  - (* both halves are the same by symmetry *)
    assert (H1 : sum m (fun i => sum n (fun j => sum n (fun k => r i j * r i k * ((z j * z j + z k * z k) / 2))))
      = sum n (fun j => z j * z j * sum n (fun k => sum m (fun i => r i j * r i k)))).
    { assert (H2 : forall i, sum n (fun j => sum n (fun k => r i j * r i k * ((z j * z j + z k * z k) / 2)))
        = sum n (fun j => sum n (fun k => r i j * r i k * (z j * z j)))).
      { intro i.
        rewrite (sum_ext n _ (fun j => / 2 * sum n (fun k => r i j * r i k * (z j * z j)) + / 2 * sum n (fun k => r i j * r i k * (z k * z k)))).
        2:{ intros j _. rewrite <- !sum_scale, <- sum_plus. apply sum_ext; intros; field. }
        rewrite sum_plus, !sum_scale. rewrite (sum_swap n n (fun j k => r i j * r i k * (z k * z k))).
        rewrite (sum_ext n (fun j => sum n (fun i0 => r i i0 * r i j * (z j * z j))) (fun j => sum n (fun k => r i j * r i k * (z j * z j)))).
        2:{ intros j _. apply sum_ext; intros; ring. }
        field. }
      rewrite (sum_ext m _ (fun i => sum n (fun j => sum n (fun k => r i j * r i k * (z j * z j))))) by (intros; apply H2).
      rewrite sum_swap. apply sum_ext. intros j _. rewrite sum_swap, <- sum_scale. apply sum_ext. intros k _.
      rewrite <- sum_scale. apply sum_ext; intros; ring. }
    rewrite H1. unfold dot. rewrite <- sum_scale. apply sum_le. intros j Hj.
    replace (y j * y j) with (z j * z j) by (unfold z; rewrite <- Rabs_mult; apply Rabs_pos_eq; nra).
    rewrite (Rmult_comm (delta * delta)). apply Rmult_le_compat_l; [nra|now apply M].
Qed.

Definition form (n : nat) (p : matrix) (x y : vector) : R := dot n x (times n p y).

(* (2c) For r >= 0: r²1 − BᵀB is positive semidefinite if and only if |B x| <= r|x| for every x. *)
Theorem gram_bound (m n : nat) (b : matrix) (r : R) : 0 <= r ->
  (forall x, 0 <= r * r * dot n x x - dot m (times n b x) (times n b x)) <-> (forall x, euclidean m (times n b x) <= r * euclidean n x).
Proof.
  intro Hr. split; intros H x; specialize (H x).
  - unfold euclidean. replace r with (sqrt (r * r)) by now apply sqrt_square.
    rewrite <- sqrt_mult by (try apply dot_pos; nra). apply sqrt_le_1_alt. lra.
  - rewrite <- !euclidean_sqr. assert (P : 0 <= euclidean m (times n b x)) by apply sqrt_pos. nra.
Qed.

Lemma discriminant a b c : (forall t, 0 <= a - 2 * t * b + t * t * c) -> 0 <= c -> b * b <= a * c.
Proof.
  intros Q P. destruct (Req_dec c 0) as [Z|Z].
  - destruct (Req_dec b 0) as [E|E]; [rewrite E, Z; lra|].
    specialize (Q ((a + 1) / (2 * b))). rewrite Z in Q. replace (2 * ((a + 1) / (2 * b)) * b) with (a + 1) in Q by (field; lra). lra.
  - specialize (Q (b / c)). replace (a - 2 * (b / c) * b + b / c * (b / c) * c) with ((a * c - b * b) / c) in Q by (field; lra).
    assert (0 <= (a * c - b * b) / c * c) by (apply Rmult_le_pos; lra).
    replace (_ / _ * _) with (a * c - b * b) in H by (field; lra). lra.
Qed.

Definition symmetric (n : nat) (p : matrix) : Prop := forall i j, (i < n)%nat -> (j < n)%nat -> p i j = p j i.

Lemma form_sym n p x y : symmetric n p -> form n p x y = form n p y x.
Proof.
  intro S. unfold form, dot, times.
  rewrite (sum_ext n _ (fun i => sum n (fun j => x i * p i j * y j))) by (intros; rewrite <- sum_scale; apply sum_ext; intros; ring).
  rewrite sum_swap. apply sum_ext. intros j Hj. rewrite <- sum_scale. apply sum_ext. intros i Hi. rewrite (S i j) by trivial. ring.
Qed.

Lemma form_cauchy n p x y : symmetric n p -> (forall z, 0 <= form n p z z) ->
  form n p x y * form n p x y <= form n p x x * form n p y y.
Proof.
  intros S P. apply discriminant; trivial. intro t.
  replace (_ - _ + _) with (form n p (fun i => x i - t * y i) (fun i => x i - t * y i)); trivial.
  assert (E : form n p (fun i => x i - t * y i) (fun i => x i - t * y i)
    = form n p x x - t * form n p x y - t * form n p y x + t * t * form n p y y).
  { unfold form, dot.
    rewrite <- !sum_scale, <- !sum_minus, <- sum_plus. apply sum_ext. intros i _.
    replace (times n p (fun i => x i - t * y i) i) with (times n p x i - t * times n p y i); [ring|].
    unfold times. rewrite <- sum_scale, <- sum_minus. apply sum_ext; intros; ring. }
  rewrite E, (form_sym n p y x S). ring.
Qed.

(* (3) with (2c): if JᵀPJ <= k²P for every Jacobian along the segment, then ‖F(x) − F(y)‖_P <= k‖x − y‖_P. *)
Theorem matrix_inequality (n : nat) (p : matrix) (f : vector -> vector) (js : matrix -> Prop) (k : R) : 0 <= k ->
  symmetric n p -> (forall z, 0 <= form n p z z) ->
  (forall j, js j -> forall e, form n p (times n j e) (times n j e) <= k * k * form n p e e) ->
  forall x y, jacobians n f js x y ->
  sqrt (form n p (subtract (f x) (f y)) (subtract (f x) (f y))) <= k * sqrt (form n p (subtract x y) (subtract x y)).
Proof.
  intros Hk S P K x y J. set (d := subtract (f x) (f y)). set (e := subtract x y).
  set (top := sqrt (form n p d d) * (k * sqrt (form n p e e))).
  assert (A : forall j, js j -> - top <= dot n (times n p d) (times n j e) <= top).
  { intros j Hj. apply Rabs_ends. rewrite dot_sym. change (dot n (times n j e) (times n p d)) with (form n p (times n j e) d).
    assert (Q := form_cauchy n p (times n j e) d S P). specialize (K j Hj e).
    unfold top. replace k with (sqrt (k * k)) by now apply sqrt_square.
    rewrite <- (sqrt_mult (k * k)) by (trivial; nra). rewrite <- sqrt_mult by (trivial; apply Rmult_le_pos; trivial; nra).
    rewrite <- sqrt_Rsqr_abs. apply sqrt_le_1_alt. unfold Rsqr. assert (Pd := P d). nra. }
  destruct (along n f js x y _ _ _ J A) as [_ B]. fold d in B.
  rewrite dot_sym in B. change (form n p d d <= top) in B. unfold top in B.
  assert (Pd := P d). assert (R1 := sqrt_pos (form n p d d)). assert (R2 := sqrt_pos (form n p e e)).
  rewrite <- (sqrt_sqrt _ Pd) in B at 1.
  destruct R1 as [R1|R1]; [|rewrite <- R1; apply Rmult_le_pos; trivial].
  apply (Rmult_le_reg_l (sqrt (form n p d d))); trivial.
Qed.

(* With P only semidefinite nothing is said of the states: diag(1, 0) contracts under (x/2, 2y), and y grows without bound. *)
Example semidefinite_is_not_enough :
  let p (i j : nat) := match i, j with O, O => 1 | _, _ => 0 end in
  let a (i j : nat) := match i, j with O, O => 1 / 2 | S O, S O => 2 | _, _ => 0 end in
  symmetric 2 p /\ (forall z, 0 <= form 2 p z z) /\
  (forall e, form 2 p (times 2 a e) (times 2 a e) <= 1 / 2 * (1 / 2) * form 2 p e e) /\
  exists x : nat -> vector, (forall n i, (i < 2)%nat -> x (S n) i = times 2 a (x n) i) /\ forall n, x n 1%nat = 2 ^ n.
Proof.
  intros p a. unfold symmetric, form, dot, times, p, a; cbn. repeat split.
  - intros [|[|i]] [|[|j]]; trivial.
  - intro z. nra.
  - intro e. nra.
  - exists (fun n i => match i with S O => 2 ^ n | _ => 0 end). split; [|trivial].
    intros n [|[|i]] Hi; [| |lia]; cbn; lra.
Qed.

(** Quadratic forms of the rows and columns from k to n − 1. *)
Definition from (k n : nat) (f : nat -> R) : R := sum (n - k) (fun i => f (k + i)%nat).
Definition form_from (k n : nat) (m : matrix) (x : vector) : R := from k n (fun i => from k n (fun j => x i * m i j * x j)).

Lemma from_first k n f : (k < n)%nat -> from k n f = f k + from (S k) n f.
Proof.
  intro H. unfold from. replace (n - k)%nat with (S (n - S k)) by lia. remember (n - S k)%nat as q eqn:E. clear.
  induction q as [|q IH]; [cbn; rewrite Nat.add_0_r; ring|].
  change (sum (S (S q)) (fun i => f (k + i)%nat)) with (sum (S q) (fun i => f (k + i)%nat) + f (k + S q)%nat).
  rewrite IH. cbn. replace (k + S q)%nat with (S (k + q)) by lia. ring.
Qed.

Lemma from_ext k n f g : (forall i, (k <= i < n)%nat -> f i = g i) -> from k n f = from k n g.
Proof. intro H. apply sum_ext. intros i Hi. apply H. lia. Qed.

Lemma from_plus k n f g : from k n (fun i => f i + g i) = from k n f + from k n g.
Proof. apply sum_plus. Qed.

Lemma from_scale k n c f : from k n (fun i => c * f i) = c * from k n f.
Proof. apply sum_scale. Qed.

Lemma form_first k n m x : (k < n)%nat -> (forall i j, m i j = m j i) ->
  form_from k n m x = m k k * x k * x k + 2 * x k * from (S k) n (fun j => m k j * x j) + form_from (S k) n m x.
Proof.
  intros H S. unfold form_from. rewrite (from_first k n _ H), (from_first k n _ H).
  rewrite (from_ext (Datatypes.S k) n (fun i => from k n (fun j => x i * m i j * x j))
    (fun i => x k * (m k i * x i) + from (Datatypes.S k) n (fun j => x i * m i j * x j))).
  2:{ intros i _. rewrite (from_first k n _ H), (S i k). ring. }
  rewrite from_plus, from_scale.
  rewrite (from_ext _ _ (fun j => x k * m k j * x j) (fun j => x k * (m k j * x j))) by (intros; ring). rewrite from_scale. ring.
Qed.

(** One round of elimination by the pivot at k, divided by the pivot before it. *)
Definition eliminated (k : nat) (m : matrix) (before : R) : matrix := fun i j => (m k k * m i j - m i k * m k j) / before.

Lemma pivot_square k n m before x : (k < n)%nat -> (forall i j, m i j = m j i) -> 0 < before -> 0 < m k k ->
  form_from k n m x = (m k k * x k + from (S k) n (fun j => m k j * x j)) ^ 2 / m k k
    + before / m k k * form_from (S k) n (eliminated k m before) x.
Proof.
  intros H S B P. rewrite form_first by trivial. set (b := from (Datatypes.S k) n (fun j => m k j * x j)).
  assert (E : form_from (Datatypes.S k) n (eliminated k m before) x = (m k k * form_from (Datatypes.S k) n m x - b * b) / before).
  { unfold form_from.
    rewrite (from_ext _ _ _ (fun i => m k k / before * from (Datatypes.S k) n (fun j => x i * m i j * x j) + - b / before * (m k i * x i))).
    - rewrite from_plus, !from_scale. fold b. field. lra.
    - intros i _. rewrite (from_ext _ _ _ (fun j => m k k / before * (x i * m i j * x j) + - (m k i * x i) / before * (m k j * x j))).
      + rewrite from_plus, !from_scale. fold b. field. lra.
      + intros j _. unfold eliminated. rewrite (S i k). field. lra. }
  rewrite E. field. lra.
Qed.

(** The elimination from row k on does not stop: a positive pivot, or a row of zeros, which is dropped. *)
Fixpoint goes_through (rounds k : nat) (n : nat) (m : matrix) (before : R) : Prop :=
  match rounds with
  | O => True
  | S rounds => (0 < m k k /\ goes_through rounds (S k) n (eliminated k m before) (m k k)) \/
      (m k k = 0 /\ (forall j, (k < j < n)%nat -> m k j = 0) /\ goes_through rounds (S k) n m before)
  end.

Lemma goes_through_form rounds : forall k n m before, n = (k + rounds)%nat -> (forall i j, m i j = m j i) -> 0 < before ->
  goes_through rounds k n m before -> forall x, 0 <= form_from k n m x.
Proof.
  induction rounds as [|rounds IH]; intros k n m before E S B G x.
  - unfold form_from, from. replace (n - k)%nat with O by lia. cbn. lra.
  - destruct G as [[P G]|[Z [R G]]].
    + rewrite (pivot_square k n m before x) by (trivial; lia).
      assert (S' : forall i j, eliminated k m before i j = eliminated k m before j i).
      { intros i j. unfold eliminated. rewrite (S i j), (S i k), (S k j). f_equal. ring. }
      assert (F := IH (Datatypes.S k) n _ _ ltac:(lia) S' P G x).
      assert (0 <= / m k k) by (left; now apply Rinv_0_lt_compat).
      unfold Rdiv. apply Rplus_le_le_0_compat; apply Rmult_le_pos; trivial; [apply pow2_ge_0|apply Rmult_le_pos; lra].
    + rewrite form_first by (trivial; lia). rewrite Z.
      rewrite (from_ext _ _ (fun j => m k j * x j) (fun _ => 0 * 0)) by (intros i Hi; rewrite R by lia; ring).
      rewrite from_scale. assert (F := IH (Datatypes.S k) n m before ltac:(lia) S B G x). lra.
Qed.

(* (4) If elimination with positive pivots, rows of zeros dropped, does not stop, xᵀMx >= 0 for every x. *)
Theorem elimination (n : nat) (m : matrix) : (forall i j, m i j = m j i) -> goes_through n O n m 1 ->
  forall x, 0 <= form n m x x.
Proof.
  intros S G x. assert (F := goes_through_form n O n m 1 eq_refl S Rlt_0_1 G x).
  replace (form n m x x) with (form_from O n m x); trivial.
  unfold form_from, from, form, dot, times. rewrite Nat.sub_0_r. apply sum_ext. intros i _.
  rewrite <- sum_scale. apply sum_ext. intros j _. cbn. ring.
Qed.

(* A pivot of 0 before a row that is not 0 must stop it: [[0, 1], [1, 0]] has only such pivots, and a form below 0. *)
Example zero_pivot_before_a_row :
  let m (i j : nat) := match i, j with O, S O | S O, O => 1 | _, _ => 0 end in
  m O O = 0 /\ m 1%nat 1%nat = 0 /\ form 2 m (fun i => match i with O => 1 | _ => -1 end) (fun i => match i with O => 1 | _ => -1 end) < 0.
Proof. unfold form, dot, times; cbn. repeat split; lra. Qed.
