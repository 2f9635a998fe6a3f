(** Vectors and matrices with entries in the reals: functions of whole numbers below n, and their sums. *)
Require Import Reals Lra Lia List.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Mean.
Open Scope R_scope.

Definition vector := nat -> R.
Definition matrix := nat -> nat -> R.

Fixpoint sum (n : nat) (f : nat -> R) : R := match n with O => 0 | S n => sum n f + f n end.
Fixpoint gains (k : nat -> R) (n : nat) : R := match n with O => 1 | S n => k n * gains k n end.

Definition times (n : nat) (a : matrix) (x : vector) : vector := fun i => sum n (fun j => a i j * x j).
Definition product (n : nat) (a b : matrix) : matrix := fun i j => sum n (fun k => a i k * b k j).
Definition dot (n : nat) (x y : vector) : R := sum n (fun i => x i * y i).
Definition subtract (x y : vector) : vector := fun i => x i - y i.

Lemma sum_ext n f g : (forall i, (i < n)%nat -> f i = g i) -> sum n f = sum n g.
Proof. induction n as [|n IH]; intro H; cbn; [reflexivity|]. rewrite IH, H; auto with arith. Qed.

Lemma sum_le n f g : (forall i, (i < n)%nat -> f i <= g i) -> sum n f <= sum n g.
Proof.
  induction n as [|n IH]; intro H; cbn; [lra|]. apply Rplus_le_compat; [apply IH; auto with arith|apply H; lia].
Qed.

Lemma sum_lt n f g : (0 < n)%nat -> (forall i, (i < n)%nat -> f i < g i) -> sum n f < sum n g.
Proof.
  intros P H. destruct n as [|n]; [lia|]. cbn. apply Rplus_le_lt_compat; [|apply H; lia].
  apply sum_le. intros i Hi. left. apply H; lia.
Qed.

Lemma sum_zero n f : (forall i, (i < n)%nat -> f i = 0) -> sum n f = 0.
Proof. induction n as [|n IH]; intro H; cbn; [reflexivity|]. rewrite IH, H; auto with arith; lra. Qed.

Lemma sum_nonneg n f : (forall i, (i < n)%nat -> 0 <= f i) -> 0 <= sum n f.
Proof. intro H. rewrite <- (sum_zero n (fun _ => 0)) by auto. now apply sum_le. Qed.

Lemma sum_plus n f g : sum n (fun i => f i + g i) = sum n f + sum n g.
Proof. induction n as [|n IH]; cbn; [lra|]. rewrite IH; lra. Qed.

Lemma sum_minus n f g : sum n (fun i => f i - g i) = sum n f - sum n g.
Proof. induction n as [|n IH]; cbn; [lra|]. rewrite IH; lra. Qed.

Lemma sum_scale n c f : sum n (fun i => c * f i) = c * sum n f.
Proof. induction n as [|n IH]; cbn; [lra|]. rewrite IH; lra. Qed.

Lemma sum_scale_r n c f : sum n (fun i => f i * c) = sum n f * c.
Proof. induction n as [|n IH]; cbn; [lra|]. rewrite IH; lra. Qed.

Lemma sum_const n c : sum n (fun _ => c) = INR n * c.
Proof. induction n as [|n IH]; [cbn; lra|]. rewrite S_INR. cbn [sum]. rewrite IH; lra. Qed.

Lemma sum_swap n m (f : nat -> nat -> R) : sum n (fun i => sum m (fun j => f i j)) = sum m (fun j => sum n (fun i => f i j)).
Proof.
  induction n as [|n IH]; cbn; [now rewrite sum_zero by trivial|]. rewrite IH, <- sum_plus. reflexivity.
Qed.

Lemma sum_abs n f : Rabs (sum n f) <= sum n (fun i => Rabs (f i)).
Proof.
  induction n as [|n IH]; cbn; [rewrite Rabs_R0; lra|]. eapply Rle_trans; [apply Rabs_triang|]. lra.
Qed.

Lemma sum_term n f i : (i < n)%nat -> (forall j, (j < n)%nat -> 0 <= f j) -> f i <= sum n f.
Proof.
  induction n as [|n IH]; intros Hi H; [lia|]. cbn.
  assert (0 <= sum n f) by (apply sum_nonneg; auto with arith).
  assert (P : 0 <= f n) by (apply H; lia).
  destruct (Nat.eq_dec i n) as [->|N]; [lra|]. assert (f i <= sum n f) by (apply IH; auto with arith; lia). lra.
Qed.

Lemma sum_single n f i : (i < n)%nat -> (forall j, (j < n)%nat -> j <> i -> f j = 0) -> sum n f = f i.
Proof.
  induction n as [|n IH]; intros Hi H; [lia|]. cbn. destruct (Nat.eq_dec i n) as [->|N].
  - rewrite sum_zero; [lra|]. intros j Hj. apply H; lia.
  - rewrite IH by (auto with arith; lia). rewrite (H n) by lia. lra.
Qed.

Lemma times_times n m a b x i : times n a (times m b x) i = times m (product n a b) x i.
Proof.
  unfold times, product.
  rewrite (sum_ext n _ (fun j => sum m (fun k => a i j * b j k * x k))).
  2:{ intros j _. rewrite <- sum_scale. apply sum_ext; intros; ring. }
  rewrite sum_swap. apply sum_ext. intros k _. now rewrite sum_scale_r.
Qed.

Lemma times_minus n a x y i : times n a (subtract x y) i = times n a x i - times n a y i.
Proof. unfold times, subtract. rewrite <- sum_minus. apply sum_ext; intros; ring. Qed.

Lemma times_ext n a x y i : (forall j, (j < n)%nat -> x j = y j) -> times n a x i = times n a y i.
Proof. intro H. apply sum_ext. intros j Hj. now rewrite H. Qed.

Lemma times_near n (a b : matrix) (x y : vector) i :
  (forall j, (j < n)%nat -> Rabs (a i j) <= b i j) -> (forall j, (j < n)%nat -> Rabs (x j) <= y j) ->
  Rabs (times n a x i) <= times n b y i.
Proof.
  intros A B. eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros j Hj. rewrite Rabs_mult.
  apply Rmult_le_compat; auto using Rabs_pos.
Qed.

Lemma is_derive_sum n (f : nat -> R -> R) (d : nat -> R) x :
  (forall i, (i < n)%nat -> is_derive (f i) x (d i)) -> is_derive (fun t => sum n (fun i => f i t)) x (sum n d).
Proof.
  induction n as [|n IH]; intro H; cbn.
  - apply (is_derive_const (V := R_NormedModule)).
  - apply (is_derive_plus (V := R_NormedModule)); [apply IH; auto with arith|apply H; lia].
Qed.

Lemma continuous_sum s n (f : nat -> R -> R) :
  (forall i, (i < n)%nat -> continuous_over s (f i)) -> continuous_over s (fun t => sum n (fun i => f i t)).
Proof.
  induction n as [|n IH]; intros H x Hx eps He; cbn.
  - exists 1; split; [lra|]. intros. rewrite Rminus_0_r, Rabs_R0. exact He.
  - destruct (IH ltac:(auto with arith) x Hx (eps / 2) ltac:(lra)) as [d1 [P1 C1]].
    destruct (H n ltac:(lia) x Hx (eps / 2) ltac:(lra)) as [d2 [P2 C2]].
    exists (Rmin d1 d2); split; [now apply Rmin_glb_lt|]. intros y Hy D.
    assert (A := C1 y Hy (Rlt_le_trans _ _ _ D (Rmin_l _ _))).
    assert (B := C2 y Hy (Rlt_le_trans _ _ _ D (Rmin_r _ _))).
    replace (_ + _ - _) with ((sum n (fun i => f i y) - sum n (fun i => f i x)) + (f n y - f n x)) by ring.
    eapply Rle_lt_trans; [apply Rabs_triang|]. lra.
Qed.

Lemma continuous_scale s (f : R -> R) c : continuous_over s f -> continuous_over s (fun t => c * f t).
Proof.
  intros C x Hx eps He. assert (P : 0 < Rabs c + 1) by (generalize (Rabs_pos c); lra).
  destruct (C x Hx (eps / (Rabs c + 1))) as [d [Hd D]]; [now apply Rdiv_lt_0_compat|].
  exists d; split; trivial. intros y Hy Hyx. specialize (D y Hy Hyx).
  rewrite <- Rmult_minus_distr_l, Rabs_mult.
  apply (Rmult_lt_compat_l (Rabs c + 1)) in D; trivial.
  replace ((Rabs c + 1) * (eps / (Rabs c + 1))) with eps in D by (field; lra).
  generalize (Rabs_pos (f y - f x)); lra.
Qed.
