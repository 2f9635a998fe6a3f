(** Norms of several states and what contracts in them: proofs/matrix.md (1)–(3), proofs/several.md (1), (2), proofs/graph.md (1), (2). *)
Require Import Reals Lra Lia List FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors.
Open Scope R_scope.

Fixpoint largest (n : nat) (x : vector) : R := match n with O => 0 | S n => Rmax (largest n x) (Rabs (x n)) end.
Definition euclidean (n : nat) (x : vector) : R := sqrt (dot n x x).

(** What both lengths of vectors with m entries have: at every vector a linear function that is the length there, and nowhere more. *)
Definition supported (m : nat) (len : vector -> R) : Prop :=
  (forall v, 0 <= len v) /\ forall v, exists c, dot m c v = len v /\ forall u, Rabs (dot m c u) <= len u.

Lemma largest_pos n x : 0 <= largest n x.
Proof. induction n as [|n IH]; cbn; [lra|]. eapply Rle_trans; [exact IH|apply Rmax_l]. Qed.

Lemma largest_ge n x i : (i < n)%nat -> Rabs (x i) <= largest n x.
Proof.
  induction n as [|n IH]; intro H; [lia|]. cbn. destruct (Nat.eq_dec i n) as [->|N]; [apply Rmax_r|].
  eapply Rle_trans; [apply IH; lia|apply Rmax_l].
Qed.

Lemma largest_le n x r : 0 <= r -> (forall i, (i < n)%nat -> Rabs (x i) <= r) -> largest n x <= r.
Proof. induction n as [|n IH]; intros P H; cbn; [trivial|]. apply Rmax_lub; auto with arith. Qed.

Lemma largest_at n x : largest n x = 0 \/ exists i, (i < n)%nat /\ largest n x = Rabs (x i).
Proof.
  induction n as [|n IH]; cbn; [now left|]. unfold Rmax. destruct (Rle_dec (largest n x) (Rabs (x n))).
  - right. exists n; split; [lia|reflexivity].
  - destruct IH as [H|[i [H E]]]; [now left|right; exists i; split; [lia|exact E]].
Qed.

Lemma largest_supported m : supported m (largest m).
Proof.
  split; [apply largest_pos|]. intro v. destruct (largest_at m v) as [E|[i [Hi E]]].
  - exists (fun _ => 0). unfold dot. split; [|intro u]; rewrite sum_zero by (intros; ring); rewrite ?Rabs_R0; auto using largest_pos.
  - exists (fun j => if Nat.eqb j i then (if Rle_dec 0 (v i) then 1 else -1) else 0). unfold dot.
    assert (S : forall u, sum m (fun j => (if Nat.eqb j i then if Rle_dec 0 (v i) then 1 else -1 else 0) * u j)
      = (if Rle_dec 0 (v i) then 1 else -1) * u i).
    { intro u. rewrite (sum_single m _ i Hi); [now rewrite Nat.eqb_refl|].
      intros j _ N. apply Nat.eqb_neq in N. rewrite N. ring. }
    split; [|intro u]; rewrite S.
    + rewrite E. unfold Rabs. destruct (Rle_dec 0 (v i)), (Rcase_abs (v i)); lra.
    + apply Rle_trans with (Rabs (u i)); [|now apply largest_ge].
      unfold Rabs. destruct (Rle_dec 0 (v i)); repeat destruct Rcase_abs; lra.
Qed.

Lemma dot_pos n x : 0 <= dot n x x.
Proof. apply sum_nonneg. intros. nra. Qed.

Lemma dot_sym n x y : dot n x y = dot n y x.
Proof. apply sum_ext. intros; ring. Qed.

(** Cauchy's inequality. *)
Lemma cauchy n x y : dot n x y ^ 2 <= dot n x x * dot n y y.
Proof.
  assert (Q : forall t, 0 <= dot n x x - 2 * t * dot n x y + t * t * dot n y y).
  { intro t. replace (_ - _ + _) with (dot n (fun i => x i - t * y i) (fun i => x i - t * y i)); [apply dot_pos|].
    unfold dot. rewrite <- !sum_scale, <- sum_minus, <- sum_plus. apply sum_ext. intros; ring. }
  assert (P := dot_pos n y). destruct (Req_dec (dot n y y) 0) as [Z|Z].
  - assert (dot n x y = 0); [|rewrite H, Z; lra].
    apply Rnot_gt_le in P || idtac. destruct (Req_dec (dot n x y) 0) as [E|E]; [exact E|].
    specialize (Q ((dot n x x + 1) / (2 * dot n x y))). rewrite Z in Q.
    replace (2 * ((dot n x x + 1) / (2 * dot n x y)) * dot n x y) with (dot n x x + 1) in Q by (field; lra). lra.
  - specialize (Q (dot n x y / dot n y y)).
    replace (dot n x x - 2 * (dot n x y / dot n y y) * dot n x y + dot n x y / dot n y y * (dot n x y / dot n y y) * dot n y y)
      with ((dot n x x * dot n y y - dot n x y ^ 2) / dot n y y) in Q by (field; lra).
    assert (0 <= (dot n x x * dot n y y - dot n x y ^ 2) / dot n y y * dot n y y) by (apply Rmult_le_pos; lra).
    replace (_ / _ * _) with (dot n x x * dot n y y - dot n x y ^ 2) in H by (field; lra). lra.
Qed.

Lemma cauchy_sqrt n x y : Rabs (dot n x y) <= euclidean n x * euclidean n y.
Proof.
  unfold euclidean. rewrite <- sqrt_mult by apply dot_pos. rewrite <- sqrt_Rsqr_abs. apply sqrt_le_1_alt.
  unfold Rsqr. generalize (cauchy n x y). lra.
Qed.

Lemma euclidean_sqr n x : euclidean n x * euclidean n x = dot n x x.
Proof. apply sqrt_sqrt, dot_pos. Qed.

Lemma euclidean_supported m : supported m (euclidean m).
Proof.
  split; [intro; apply sqrt_pos|]. intro v. destruct (Req_dec (euclidean m v) 0) as [Z|Z].
  - exists (fun _ => 0). unfold dot. split; [|intro u]; rewrite sum_zero by (intros; ring); [now symmetry|]. rewrite Rabs_R0. apply sqrt_pos.
  - exists (fun i => / euclidean m v * v i).
    assert (S : forall u, dot m (fun i => / euclidean m v * v i) u = / euclidean m v * dot m v u).
    { intro u. unfold dot. rewrite <- sum_scale. apply sum_ext; intros; ring. }
    assert (P : 0 < euclidean m v) by (assert (0 <= euclidean m v) by apply sqrt_pos; lra).
    split; [|intro u]; rewrite S.
    + rewrite <- euclidean_sqr. field. exact Z.
    + rewrite Rabs_mult, (Rabs_pos_eq (/ _)) by (left; now apply Rinv_0_lt_compat).
      apply (Rmult_le_reg_l (euclidean m v)); trivial. rewrite <- Rmult_assoc, Rinv_r, Rmult_1_l by trivial.
      apply cauchy_sqrt.
Qed.

Lemma supported_le m len u v : supported m len -> (forall i, (i < m)%nat -> u i = v i) -> len u <= len v.
Proof.
  intros [_ S] E. destruct (S u) as [c [<- H]].
  replace (dot m c u) with (dot m c v) by (apply sum_ext; intros; now rewrite E).
  eapply Rle_trans; [apply Rle_abs|apply H].
Qed.

Lemma supported_ext m len u v : supported m len -> (forall i, (i < m)%nat -> u i = v i) -> len u = len v.
Proof. intros S E. apply Rle_antisym; apply (supported_le m); trivial. intros; now rewrite E. Qed.

Lemma supported_triangle m len u v : supported m len -> len (fun i => u i + v i) <= len u + len v.
Proof.
  intros [_ S]. destruct (S (fun i => u i + v i)) as [c [<- H]].
  replace (dot m c _) with (dot m c u + dot m c v) by (unfold dot; rewrite <- sum_plus; apply sum_ext; intros; ring).
  apply Rplus_le_compat; eapply Rle_trans; (apply Rle_abs || apply H).
Qed.

(** ‖e‖ = |V e|, V with m rows and a left inverse L: L V = 1. *)
Definition left_inverse (n m : nat) (l v : matrix) : Prop :=
  forall i j, (i < n)%nat -> (j < n)%nat -> product m l v i j = if Nat.eqb i j then 1 else 0.

Definition norm (n : nat) (len : vector -> R) (v : matrix) (e : vector) : R := len (times n v e).

Lemma recovered n m l v e i : left_inverse n m l v -> (i < n)%nat -> times m l (times n v e) i = e i.
Proof.
  intros E Hi. rewrite times_times. unfold times. rewrite (sum_single n _ i Hi).
  - rewrite E, Nat.eqb_refl by trivial. ring.
  - intros j Hj N. rewrite E by trivial. apply not_eq_sym, Nat.eqb_neq in N. rewrite N. ring.
Qed.

(* (1a) ‖·‖ is a norm: no vector but 0 has ‖e‖ = 0, and ‖e + f‖ <= ‖e‖ + ‖f‖. *)
Theorem metric_is_norm (n m : nat) (len : vector -> R) (l v : matrix) :
  len = largest m \/ len = euclidean m -> left_inverse n m l v ->
  (forall e, norm n len v e = 0 -> forall i, (i < n)%nat -> e i = 0) /\
  (forall e f, norm n len v (fun i => e i + f i) <= norm n len v e + norm n len v f) /\
  (forall e c, norm n len v (fun i => c * e i) = Rabs c * norm n len v e).
Proof.
  intros K E. assert (S : supported m len) by (destruct K as [->| ->]; [apply largest_supported|apply euclidean_supported]).
  repeat split.
  - intros e Z i Hi. rewrite <- (recovered n m l v e i E Hi). unfold times at 1. apply sum_zero. intros j Hj.
    enough (times n v e j = 0) as -> by ring. unfold norm in Z. destruct K as [->| ->].
    + assert (H := largest_ge m (times n v e) j Hj). rewrite Z in H.
      assert (P := Rabs_pos (times n v e j)). apply Rabs_eq_0. lra.
    + assert (H := euclidean_sqr m (times n v e)). rewrite Z in H.
      assert (P := sum_term m (fun i => times n v e i * times n v e i) j Hj ltac:(intros; nra)). unfold dot in H. cbn in P. nra.
  - intros e f. unfold norm. eapply Rle_trans; [|apply (supported_triangle m); exact S].
    right. apply (supported_ext m); [exact S|]. intros i _. unfold times. rewrite <- sum_plus. apply sum_ext; intros; ring.
  - intros e c. unfold norm. rewrite (supported_ext m len _ (fun i => c * times n v e i) S).
    2:{ intros i _. unfold times. rewrite <- sum_scale. apply sum_ext; intros; ring. }
    destruct K as [->| ->].
    + clear. induction m as [|k IH]; cbn; [ring|]. rewrite IH, Rabs_mult. apply RmaxRmult, Rabs_pos.
    + unfold euclidean. replace (dot m _ _) with ((c * c) * dot m (times n v e) (times n v e)).
      * rewrite sqrt_mult by (try apply dot_pos; nra). f_equal. apply (sqrt_Rsqr_abs c).
      * unfold dot. rewrite <- sum_scale. apply sum_ext; intros; ring.
Qed.

(* (1b) |e_s| <= σ_s‖e‖ with σ_s = Σ |L_sk|, where |·| is the largest magnitude. *)
Theorem projection_largest (n m : nat) (l v : matrix) (e : vector) (s : nat) : left_inverse n m l v -> (s < n)%nat ->
  Rabs (e s) <= sum m (fun k => Rabs (l s k)) * norm n (largest m) v e.
Proof.
  intros E Hs. rewrite <- (recovered n m l v e s E Hs) at 1. eapply Rle_trans; [apply sum_abs|].
  rewrite <- sum_scale_r. apply sum_le. intros k Hk. rewrite Rabs_mult.
  apply Rmult_le_compat_l; [apply Rabs_pos|now apply largest_ge].
Qed.

(* (1b) |e_s| <= σ_s‖e‖ with σ_s = √(Σ L_sk²), where |·| is the Euclidean length. *)
Theorem projection_euclidean (n m : nat) (l v : matrix) (e : vector) (s : nat) : left_inverse n m l v -> (s < n)%nat ->
  Rabs (e s) <= sqrt (sum m (fun k => l s k * l s k)) * norm n (euclidean m) v e.
Proof.
  intros E Hs. rewrite <- (recovered n m l v e s E Hs) at 1. apply (cauchy_sqrt m (l s) (times n v e)).
Qed.

(* (1e) ‖A e‖ <= ‖V A L‖‖e‖: if |V A L y| <= k|y| for every y, then ‖A e‖ <= k‖e‖; from one norm to another, stances (1). *)
Theorem induced_norm (n m m' : nat) (len len' : vector -> R) (l v v' a : matrix) (k : R) :
  left_inverse n m l v -> (forall y, len' (times m (product n (product n v' a) l) y) <= k * len y) ->
  supported m' len' -> forall e, norm n len' v' (times n a e) <= k * norm n len v e.
Proof.
  intros E K S e. eapply Rle_trans; [|apply (K (times n v e))]. right. unfold norm. apply (supported_ext m'); trivial.
  intros i _. rewrite (times_times n n v' a e), <- (times_times n m (product n v' a) l). apply times_ext. intros j Hj. symmetry. now apply recovered with (m := m).
Qed.

(** Along the segment from y to x, F is continuous, and smooth but for finitely many points, with Jacobians in [js]. *)
Definition on (x y : vector) (t : R) : vector := fun i => y i + t * (x i - y i).

Definition jacobians (n : nat) (f : vector -> vector) (js : matrix -> Prop) (x y : vector) : Prop :=
  (forall i, (i < n)%nat -> continuous_over (between 0 1) (fun t => f (on x y t) i)) /\
  exists cuts, forall t, 0 < t < 1 -> ~ In t cuts -> exists j, js j /\
    forall i, (i < n)%nat -> is_derive (fun t => f (on x y t) i) t (times n j (subtract x y) i).

(** Any linear function of F(x) − F(y) is a mean of what it is of J(x − y). *)
Lemma along n f js x y (c : vector) lo hi : jacobians n f js x y ->
  (forall j, js j -> lo <= dot n c (times n j (subtract x y)) <= hi) -> lo <= dot n c (subtract (f x) (f y)) <= hi.
Proof.
  intros [C [cuts D]] B.
  assert (M := mean_value (fun t => dot n c (f (on x y t))) 0 1 cuts lo hi Rle_0_1).
  assert (on x y 1 = x) as E1 by (apply functional_extensionality; intro; unfold on; ring).
  assert (on x y 0 = y) as E0 by (apply functional_extensionality; intro; unfold on; ring).
  cbv beta in M. rewrite E1, E0, Rminus_0_r, !Rmult_1_r in M.
  replace (dot n c (subtract (f x) (f y))) with (dot n c (f x) - dot n c (f y))
    by (unfold dot, subtract; rewrite <- sum_minus; apply sum_ext; intros; ring).
  apply M.
  - apply (continuous_sum _ n (fun i t => c i * f (on x y t) i)). intros i Hi. now apply continuous_scale, C.
  - intros t Ht N. destruct (D t Ht N) as [j [Hj J]]. exists (dot n c (times n j (subtract x y))). split; [|now apply B].
    apply (is_derive_sum n (fun i t => c i * f (on x y t) i)). intros i Hi.
    apply (is_derive_scal (fun t => f (on x y t) i)). now apply J.
Qed.

(* (3) If ‖J e‖ <= k‖e‖ for every Jacobian along the segment, then ‖F(x, w) − F(y, w)‖ <= k‖x − y‖; stances (2) from norm to norm. *)
Theorem mean_value_norm (n m m' : nat) (len len' : vector -> R) (v v' : matrix) (f : vector -> vector) (js : matrix -> Prop) (k : R) :
  supported m' len' -> (forall j, js j -> forall e, norm n len' v' (times n j e) <= k * norm n len v e) ->
  forall x y, jacobians n f js x y -> norm n len' v' (subtract (f x) (f y)) <= k * norm n len v (subtract x y).
Proof.
  intros S K x y J. unfold norm at 1. destruct S as [P S].
  destruct (S (times n v' (subtract (f x) (f y)))) as [c [<- H]].
  (* the linear function of F(x) − F(y) that is its norm *)
  assert (T : forall e, dot m' c (times n v' e) = dot n (fun i => sum m' (fun r => c r * v' r i)) e).
  { intro e. unfold dot, times.
    rewrite (sum_ext m' _ (fun r => sum n (fun i => c r * v' r i * e i))).
    2:{ intros r _. rewrite <- sum_scale. apply sum_ext; intros; ring. }
    rewrite sum_swap. apply sum_ext. intros i _. now rewrite sum_scale_r. }
  set (d := subtract x y). rewrite T.
  assert (A : forall j, js j -> - (k * norm n len v d) <= dot n (fun i => sum m' (fun r => c r * v' r i)) (times n j d) <= k * norm n len v d).
  { intros j Hj. rewrite <- T. apply Rabs_ends. eapply Rle_trans; [apply H|now apply K]. }
  apply (along n f js x y _ _ _ J A).
Qed.
