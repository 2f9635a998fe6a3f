(** Comparison entry by entry, of one map and along all steps between stances: proofs/matrix.md (5), proofs/graph.md (4), (5). *)
Require Import Reals Lra Lia.
From Ultibound Require Import Bound Mean Vectors.
Open Scope R_scope.

(** What holds of all small numbers, for each of finitely many, holds of all of them at some number. *)
Lemma common n (P : nat -> R -> Prop) :
  (forall i, (i < n)%nat -> exists u, 0 < u /\ forall v, 0 < v <= u -> P i v) ->
  exists u, 0 < u /\ forall v, 0 < v <= u -> forall i, (i < n)%nat -> P i v.
Proof.
  induction n as [|n IH]; intro H; [exists 1; split; [lra|intros; lia]|].
  destruct IH as [u [Hu A]]; [auto with arith|]. destruct (H n) as [u' [Hu' B]]; [lia|].
  assert (L := Rmin_l u u'). assert (L' := Rmin_r u u').
  exists (Rmin u u'); split; [now apply Rmin_glb_lt|]. intros v Hv i Hi.
  destruct (Nat.eq_dec i n) as [->|N]; [apply B; lra|apply A; [lra|lia]].
Qed.

Section Stances.
(** Stances are numbered; [follows s t] where the step s → t is allowed; in stance s the error has [size s] entries. *)
Variables (stances : nat) (follows : nat -> nat -> bool) (size : nat -> nat).
Variables (K : nat -> nat -> matrix) (eps : nat -> nat -> vector).

(** A course of stances, and errors that every step compares: |y⁺| <= K_st|y| + eps_st entry by entry. *)
Definition course (st : nat -> nat) : Prop :=
  forall n, (st n < stances)%nat /\ follows (st n) (st (S n)) = true.

Definition compared (st : nat -> nat) (y : nat -> vector) : Prop :=
  forall n i, (i < size (st (S n)))%nat ->
    Rabs (y (S n) i) <= times (size (st n)) (K (st n) (st (S n))) (fun j => Rabs (y n j)) i + eps (st n) (st (S n)) i.

(* Stances (5), one map (one stance) matrix.md (5): with K b + eps <= b and K p < p on every step, |y| < b' in the end. *)
Theorem comparison (b p : nat -> vector) (D : R) :
  (forall s t i j, (s < stances)%nat -> (t < stances)%nat -> 0 <= K s t i j) ->
  (forall s i, (s < stances)%nat -> (i < size s)%nat -> 0 < p s i) ->
  (forall s t i, (s < stances)%nat -> (t < stances)%nat -> follows s t = true -> (i < size t)%nat ->
     times (size s) (K s t) (b s) i + eps s t i <= b t i /\ times (size s) (K s t) (p s) i < p t i) ->
  forall b' : nat -> vector, (forall s i, (s < stances)%nat -> (i < size s)%nat -> b s i < b' s i) ->
  exists N, forall st y, course st -> compared st y -> (forall i, (i < size (st O))%nat -> Rabs (y O i) <= D) ->
  forall n, (N <= n)%nat -> forall i, (i < size (st n))%nat -> Rabs (y n i) < b' (st n) i.
Proof.
  intros HK Hp Hs b' Hb.
  (* K p <= (1 − u) p on every step, D <= b + p/u, and u p < b' − b *)
  assert (A : exists u, 0 < u /\ forall v, 0 < v <= u -> forall s, (s < stances)%nat -> forall t, (t < stances)%nat ->
    forall i, (i < size t)%nat -> follows s t = true -> times (size s) (K s t) (p s) i <= (1 - v) * p t i).
  { apply common. intros s Is. apply common. intros t It. apply common. intros i Ii.
    destruct (follows s t) eqn:E; [|exists 1; split; [lra|discriminate]].
    destruct (Hs s t i Is It E Ii) as [_ L]. assert (P := Hp t i It Ii).
    exists ((p t i - times (size s) (K s t) (p s) i) / p t i). split; [apply Rdiv_lt_0_compat; lra|].
    intros v Hv _. assert (v * p t i <= p t i - times (size s) (K s t) (p s) i); [|lra].
    replace (p t i - _) with ((p t i - times (size s) (K s t) (p s) i) / p t i * p t i) by (field; lra).
    apply Rmult_le_compat_r; lra. }
  assert (B : exists u, 0 < u /\ forall v, 0 < v <= u -> forall s, (s < stances)%nat ->
    forall i, (i < size s)%nat -> D <= b s i + / v * p s i).
  { apply common. intros s Is. apply common. intros i Ii. assert (P := Hp s i Is Ii).
    assert (Q : 0 < Rabs (D - b s i) + 1) by (generalize (Rabs_pos (D - b s i)); lra).
    exists (p s i / (Rabs (D - b s i) + 1)). split; [now apply Rdiv_lt_0_compat|]. intros v Hv.
    assert (Rabs (D - b s i) + 1 <= / v * p s i); [|generalize (Rle_abs (D - b s i)); lra].
    apply (Rmult_le_reg_l v); [lra|]. rewrite <- Rmult_assoc, Rinv_r, Rmult_1_l by lra.
    replace (p s i) with (p s i / (Rabs (D - b s i) + 1) * (Rabs (D - b s i) + 1)) by (field; lra).
    apply Rmult_le_compat_r; lra. }
  assert (C : exists u, 0 < u /\ forall v, 0 < v <= u -> forall s, (s < stances)%nat ->
    forall i, (i < size s)%nat -> v * p s i < b' s i - b s i).
  { apply common. intros s Is. apply common. intros i Ii. assert (P := Hp s i Is Ii). specialize (Hb s i Is Ii).
    exists ((b' s i - b s i) / (2 * p s i)). split; [apply Rdiv_lt_0_compat; lra|]. intros v Hv.
    apply Rle_lt_trans with ((b' s i - b s i) / (2 * p s i) * p s i); [apply Rmult_le_compat_r; lra|].
    replace (_ / _ * _) with ((b' s i - b s i) / 2) by (field; lra). lra. }
  destruct A as [u [Hu A]], B as [v [Hv B]], C as [w [Hw C]].
  set (m := Rmin u (1 / 2)). assert (Hm : 0 < m <= u /\ m <= 1 / 2).
  { unfold m; repeat split; [apply Rmin_glb_lt; lra|apply Rmin_l|apply Rmin_r]. }
  specialize (A m (proj1 Hm)). specialize (B v (conj Hv (Rle_refl v))).
  destruct (pow_lt_1_zero (1 - m) ltac:(rewrite Rabs_pos_eq; lra) (w * v) (Rmult_lt_0_compat _ _ Hw Hv)) as [N HN].
  exists N. intros st y Co Cp S0.
  assert (Main : forall n i, (i < size (st n))%nat -> Rabs (y n i) <= b (st n) i + (1 - m) ^ n * / v * p (st n) i).
  { induction n as [|n IH]; intros i Ii.
    - rewrite pow_O, Rmult_1_l. destruct (Co O) as [I0 _]. eapply Rle_trans; [now apply S0|now apply B].
    - destruct (Co n) as [In E]. destruct (Co (S n)) as [In' _].
      destruct (Hs _ _ i In In' E Ii) as [L _]. specialize (A _ In _ In' i Ii E).
      eapply Rle_trans; [now apply Cp|].
      apply Rle_trans with (times (size (st n)) (K (st n) (st (S n)))
        (fun j => b (st n) j + (1 - m) ^ n * / v * p (st n) j) i + eps (st n) (st (S n)) i).
      { apply Rplus_le_compat_r. apply sum_le. intros j Hj. apply Rmult_le_compat_l; auto. }
      assert (Split : times (size (st n)) (K (st n) (st (S n))) (fun j => b (st n) j + (1 - m) ^ n * / v * p (st n) j) i
        = times (size (st n)) (K (st n) (st (S n))) (b (st n)) i
          + (1 - m) ^ n * / v * times (size (st n)) (K (st n) (st (S n))) (p (st n)) i).
      { unfold times. rewrite <- sum_scale, <- sum_plus. apply sum_ext. intros; ring. }
      assert (G : (1 - m) ^ n * / v * times (size (st n)) (K (st n) (st (S n))) (p (st n)) i
        <= (1 - m) ^ n * / v * ((1 - m) * p (st (S n)) i)).
      { apply Rmult_le_compat_l; trivial. apply Rmult_le_pos; [apply pow_le; lra|left; now apply Rinv_0_lt_compat]. }
      rewrite Split. cbn [pow]. lra. }
  intros n Hn i Ii. eapply Rle_lt_trans; [now apply Main|]. destruct (Co n) as [In _].
  assert (Hx : 0 < (1 - m) ^ n * / v <= w).
  { split; [apply Rmult_lt_0_compat; [apply pow_lt; lra|now apply Rinv_0_lt_compat]|].
    specialize (HN n Hn). rewrite Rabs_pos_eq in HN by (apply pow_le; lra).
    apply (Rmult_le_reg_r v); trivial. rewrite Rmult_assoc, Rinv_l by lra. lra. }
  specialize (C _ Hx _ In i Ii). lra.
Qed.
End Stances.

(* Spectral radii below 1 of single matrices are not enough: [[0, 2], [0, 0]] and its transpose, each with square 0, in turn. *)
Example no_bound_by_single_radii :
  let a (t i j : nat) := match t, i, j with O, O, S O => 2 | S _, S O, O => 2 | _, _, _ => 0 end in
  (forall t i j, (i < 2)%nat -> (j < 2)%nat -> product 2 (a t) (a t) i j = 0) /\
  exists (w : nat -> nat) (x : nat -> vector), (forall n i, (i < 2)%nat -> x (S n) i = times 2 (a (w n)) (x n) i) /\
  forall n, x n O + x n 1%nat = 2 ^ n.
Proof.
  intro a. split.
  - intros [|t] [|[|i]] [|[|j]] Hi Hj; try lia; unfold product, a; cbn; lra.
  - exists (fun n => if Nat.even n then O else 1%nat).
    exists (fun n i => if Nat.eqb i (if Nat.even n then 1 else 0) then 2 ^ n else 0).
    split.
    + intros n i Hi. rewrite Nat.even_succ, <- Nat.negb_even. unfold times, a; cbn.
      destruct i as [|[|i]]; [| |lia]; destruct (Nat.even n); cbn; lra.
    + intro n. destruct (Nat.even n); cbn; lra.
Qed.

(* p > 0 is needed: K = 2 has K p < p with p = −1, and K b + 0 <= b with b = 0, and |y⁺| = 2|y| grows. *)
Example positive_weights_needed :
  let K (_ _ _ _ : nat) := 2 in let y n (_ : nat) := 2 ^ n in
  times 1 (K O O) (fun _ => -1) O < -1 /\ times 1 (K O O) (fun _ => 0) O + 0 <= 0 /\
  compared (fun _ => 1%nat) K (fun _ _ _ => 0) (fun _ => O) y /\ forall n, 1 <= Rabs (y n O).
Proof.
  intros K y. unfold times, K; cbn. repeat split; try lra.
  - intros n i Hi. unfold times, y; cbn. rewrite !Rabs_pos_eq; [lra| |]; try apply pow_le; try (apply Rmult_le_pos; [lra|apply pow_le]); lra.
  - intro n. unfold y. rewrite Rabs_pos_eq by (apply pow_le; lra). apply pow_R1_Rle. lra.
Qed.
