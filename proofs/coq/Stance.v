(** Signals and pushes within a stance: proofs/stance.md (5), (6), (7), proofs/signals.md (3), (4). *)
Require Import Reals Lra Lia List.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Slope Trajectory.
Open Scope R_scope.

(** The Riemann integral. *)
Definition integral (f : R -> R) (a b : R) : R := RInt f a b.

(* Stance (5), signals that have a Riemann integral: if f >= 0 and l <= u <= h, ∫ f u = w ∫ f for some w in [l, h]. *)
Theorem mean_of_signal (f u : R -> R) (a b l h : R) : a <= b -> l <= h -> ex_RInt f a b -> ex_RInt (fun t => f t * u t) a b ->
  (forall t, a < t < b -> 0 <= f t /\ l <= u t <= h) -> exists w, l <= w <= h /\ integral (fun t => f t * u t) a b = w * integral f a b.
Proof.
  intros L Lh If Ifu B.
  assert (Sc : forall c, ex_RInt (fun t => c * f t) a b) by (intro c; apply (ex_RInt_scal (V := R_NormedModule) f a b c If)).
  assert (Es : forall c, integral (fun t => c * f t) a b = c * integral f a b) by (intro c; exact (RInt_scal (V := R_CompleteNormedModule) f a b c If)).
  assert (Low : l * integral f a b <= integral (fun t => f t * u t) a b).
  { rewrite <- Es. unfold integral. apply RInt_le; trivial. intros t Ht. destruct (B t Ht). nra. }
  assert (High : integral (fun t => f t * u t) a b <= h * integral f a b).
  { rewrite <- Es. unfold integral. apply RInt_le; trivial. intros t Ht. destruct (B t Ht). nra. }
  assert (P : 0 <= integral f a b) by (unfold integral; apply RInt_ge_0; trivial; intros; now apply B).
  destruct P as [P|P].
  - exists (integral (fun t => f t * u t) a b / integral f a b). split; [|field; lra].
    split; apply (Rmult_le_reg_r (integral f a b)); trivial; unfold Rdiv; rewrite Rmult_assoc, Rinv_l by lra; lra.
  - exists l. split; [lra|]. rewrite <- P in *. lra.
Qed.

(* Signals (3), one part: if g is continuous on [a, b] and |v| <= r, ∫ g v = (b − a) g(θ) c for some θ in [a, b] and c in [−r, r]. *)
Theorem part_of_signal (g v : R -> R) (a b r : R) : a < b -> 0 <= r -> continuous_over (between a b) g -> ex_RInt (fun t => g t * v t) a b ->
  (forall t, a < t < b -> Rabs (v t) <= r) ->
  exists theta c, between a b theta /\ Rabs c <= r /\ integral (fun t => g t * v t) a b = (b - a) * (g theta * c).
Proof.
  intros L Hr C Ig B.
  destruct (continuity_ab_maj (fun t => Rabs (g (clip a b t))) a b (Rlt_le _ _ L)) as [th [Hm Ht]].
  { intros t _. apply (continuity_pt_comp (fun t => g (clip a b t)) Rabs); [apply continuous_clip; [lra|exact C]|apply Rcontinuity_abs]. }
  assert (M : forall t, between a b t -> Rabs (g t) <= Rabs (g th)).
  { intros t Hb. specialize (Hm t Hb). rewrite !clip_same in Hm; trivial. }
  set (top := Rabs (g th)) in *. assert (T0 : 0 <= top) by apply Rabs_pos.
  assert (Bd : Rabs (integral (fun t => g t * v t) a b) <= (b - a) * (top * r)).
  { assert (Q : forall t, a < t < b -> - (top * r) <= g t * v t <= top * r).
    { intros t Hb. apply Rabs_ends. rewrite Rabs_mult. apply Rmult_le_compat; try apply Rabs_pos; [apply M; unfold between; lra|now apply B]. }
    assert (Kc : forall c, integral (fun _ => c) a b = (b - a) * c) by (intro c; exact (RInt_const (V := R_CompleteNormedModule) a b c)).
    apply Rabs_le_between. rewrite <- (Kc (top * r)). replace (- integral (fun _ => top * r) a b) with (integral (fun _ => - (top * r)) a b) by (rewrite !Kc; ring).
    unfold integral. split; apply RInt_le; try lra; trivial; try apply (ex_RInt_const (V := R_NormedModule)); intros t Hb; apply Q; lra. }
  destruct (Req_dec (g th) 0) as [Z|Z].
  - exists th, 0. rewrite Rabs_R0. split; [exact Ht|]. split; [exact Hr|]. unfold top in Bd. rewrite Z, Rabs_R0 in Bd.
    assert (Rabs (integral (fun t => g t * v t) a b) = 0) by (assert (P := Rabs_pos (integral (fun t => g t * v t) a b)); lra).
    apply Rabs_eq_0 in H. rewrite H. ring.
  - exists th, (integral (fun t => g t * v t) a b / ((b - a) * g th)). split; [exact Ht|]. split; [|field; split; [exact Z|lra]].
    unfold Rdiv. rewrite Rabs_mult, Rabs_inv, Rabs_mult, (Rabs_pos_eq (b - a)) by lra. fold top.
    assert (Tp : 0 < top) by (apply Rabs_pos_lt; exact Z).
    apply (Rmult_le_reg_r ((b - a) * top)); [nra|]. rewrite Rmult_assoc, Rinv_l by nra. lra.
Qed.

(* Signals (4): from |∂F/∂x| <= k under every course of the signals, two trajectories under the same w and u approach each other by k. *)
Theorem gain_under_any_course {W U : Type} (s : R -> Prop) (F : R -> W -> U -> R) (k : R) : convex s ->
  (forall w u, slopes_at_most s (fun x => F x w u) k) -> forall w u x y, s x -> s y -> Rabs (F x w u - F y w u) <= k * Rabs (x - y).
Proof. intros V K w u x y Hx Hy. exact (slope_gain s (fun x => F x w u) k V (K w u) x y Hx Hy). Qed.

(** Two solutions of x' = A x + b that start alike are the same. *)
Lemma unique (n : nat) (a b : R) (A : R -> matrix) (B : matrix) (free : R -> vector) (x y : nat -> R -> R) : a < b ->
  (forall i j t, (i < n)%nat -> (j < n)%nat -> a < t < b -> Rabs (A t i j) <= B i j) ->
  (forall i, (i < n)%nat -> continuous_over (between a b) (x i) /\ continuous_over (between a b) (y i)) ->
  (forall i t, (i < n)%nat -> a < t < b -> is_derive (x i) t (sum n (fun k => A t i k * x k t) + free t i) /\
    is_derive (y i) t (sum n (fun k => A t i k * y k t) + free t i)) ->
  (forall i, (i < n)%nat -> x i a = y i a) -> forall i t, (i < n)%nat -> between a b t -> x i t = y i t.
Proof.
  intros L HB C D S0 i t Hi Ht.
  assert (Z : Rabs (x i t - y i t) <= 0).
  { apply (comparison_of_solutions n a b B (fun _ => 0) (fun i t => x i t - y i t) (fun _ _ => 0) (Rlt_le _ _ L)) with (i := i); trivial.
    - intros k Hk. split.
      + apply (continuous_plus _ (x k) (fun t => - y k t)); [apply (C k Hk)|apply continuous_opposite, (C k Hk)].
      + intros r Hr. exists (A r k), 0. split; [|split; [intros j Hj; now apply HB|rewrite Rabs_R0; lra]].
        destruct (D k r Hk Hr) as [Dx Dy].
        replace (sum n (fun j => A r k j * (x j r - y j r)) + 0) with ((sum n (fun q => A r k q * x q r) + free r k) - (sum n (fun q => A r k q * y q r) + free r k)).
        * apply (is_derive_minus (V := R_NormedModule) (x k) (y k)); assumption.
        * rewrite (sum_ext n (fun j => A r k j * (x j r - y j r)) (fun j => A r k j * x j r - A r k j * y j r)) by (intros; ring).
          rewrite sum_minus. ring.
    - intros k Hk. split.
      + intros z _ eps He. exists 1. split; [lra|]. intros. now rewrite Rminus_0_r, Rabs_R0.
      + intros r Hr. exists 0. split; [apply (is_derive_const (V := R_NormedModule))|]. rewrite sum_zero by (intros; ring). lra.
    - intros k j Hk Hj. eapply Rle_trans; [apply Rabs_pos|apply (HB k j ((a + b) / 2)); trivial; lra].
    - intros k Hk. rewrite S0, Rminus_diag_eq, Rabs_R0 by trivial. lra. }
  assert (P := Rabs_pos (x i t - y i t)). assert (E : Rabs (x i t - y i t) = 0) by lra. apply Rabs_eq_0 in E. lra.
Qed.

(** Solutions x and, changed by δ in state i at phase θ, y, up to touchdown at 1. *)
Definition changed (n : nat) (theta : R) (A : R -> matrix) (free : R -> vector) (x y : nat -> R -> R) (i : nat) (delta : R) : Prop :=
  (forall k, (k < n)%nat -> continuous_over (between theta 1) (x k) /\ continuous_over (between theta 1) (y k)) /\
  (forall k t, (k < n)%nat -> theta < t < 1 -> is_derive (x k) t (sum n (fun j => A t k j * x j t) + free t k) /\
    is_derive (y k) t (sum n (fun j => A t k j * y j t) + free t k)) /\
  forall k, (k < n)%nat -> y k theta = x k theta + (if Nat.eqb k i then delta else 0).

(** A fundamental solution, from θ on. *)
Definition fundamental (n : nat) (theta : R) (A : R -> matrix) (Phi : nat -> nat -> R -> R) : Prop :=
  forall k j, (k < n)%nat -> (j < n)%nat -> continuous_over (between theta 1) (Phi k j) /\
  forall t, theta < t < 1 -> is_derive (Phi k j) t (sum n (fun q => A t k q * Phi q j t)).

(* Stance (6): for one state a change δ at phase θ changes touchdown by δ Φ(1)/Φ(θ). *)
Theorem growth_of_one (theta : R) (A : R -> matrix) (B : matrix) (free : R -> vector) (Phi : nat -> nat -> R -> R) (x y : nat -> R -> R) (delta : R) :
  theta < 1 -> (forall t, theta < t < 1 -> Rabs (A t O O) <= B O O) -> fundamental 1 theta A Phi -> Phi O O theta <> 0 ->
  changed 1 theta A free x y O delta -> y O 1 - x O 1 = delta * (Phi O O 1 / Phi O O theta).
Proof.
  intros L HB Fu N [C [D S0]]. destruct (Fu O O ltac:(lia) ltac:(lia)) as [Cp Dp].
  assert (E : y O 1 = (fun t => x O t + delta / Phi O O theta * Phi O O t) 1).
  { apply (unique 1 theta 1 A B free y (fun _ t => x O t + delta / Phi O O theta * Phi O O t) L) with (i := O); try lia; try (unfold between; lra).
    - intros i j t Hi Hj Ht. replace i with O by lia. replace j with O by lia. now apply HB.
    - intros i Hi. replace i with O by lia. split; [apply (C O); lia|].
      apply (continuous_plus _ (x O) (fun t => delta / Phi O O theta * Phi O O t)); [apply (C O); lia|now apply continuous_scale].
    - intros i t Hi Ht. replace i with O by lia. destruct (D O t ltac:(lia) Ht) as [Dx Dy]. split; [exact Dy|].
      replace (sum 1 (fun k => A t O k * (x O t + delta / Phi O O theta * Phi O O t)) + free t O) with
        ((sum 1 (fun j => A t O j * x j t) + free t O) + delta / Phi O O theta * sum 1 (fun q => A t O q * Phi q O t)) by (cbn; ring).
      apply (is_derive_plus (V := R_NormedModule) (x O) (fun t => delta / Phi O O theta * Phi O O t)); [exact Dx|].
      apply (is_derive_scal (Phi O O)). now apply Dp.
    - intros i Hi. replace i with O by lia. rewrite (S0 O) by lia. cbn. field. exact N. }
  rewrite E. field. exact N.
Qed.

(* Stance (6): without damping the determinant of Φ stays what it is. *)
Theorem liouville (theta : R) (A : R -> matrix) (Phi : nat -> nat -> R -> R) : theta < 1 -> fundamental 2 theta A Phi ->
  (forall t, theta < t < 1 -> A t O O = 0 /\ A t 1%nat 1%nat = 0) ->
  let det t := Phi O O t * Phi 1%nat 1%nat t - Phi O 1%nat t * Phi 1%nat O t in det 1 = det theta.
Proof.
  intros L Fu Z det.
  assert (P : forall k j l m, (k < 2)%nat -> (j < 2)%nat -> (l < 2)%nat -> (m < 2)%nat -> continuous_over (between theta 1) (fun t => Phi k j t * Phi l m t)).
  { intros k j l m Hk Hj Hl Hm z Hz eps He.
    destruct (Fu k j Hk Hj) as [C1 _]. destruct (Fu l m Hl Hm) as [C2 _].
    set (p := Rabs (Phi k j z) + 1). set (q := Rabs (Phi l m z) + 1).
    assert (Hp : 0 < p) by (unfold p; generalize (Rabs_pos (Phi k j z)); lra). assert (Hq : 0 < q) by (unfold q; generalize (Rabs_pos (Phi l m z)); lra).
    destruct (C1 z Hz (Rmin 1 (eps / (2 * q)))) as [d1 [P1 D1]]; [apply Rmin_glb_lt; [lra|apply Rdiv_lt_0_compat; lra]|].
    destruct (C2 z Hz (eps / (2 * p))) as [d2 [P2 D2]]; [apply Rdiv_lt_0_compat; lra|].
    exists (Rmin d1 d2). split; [now apply Rmin_glb_lt|]. intros y Hy Hyz.
    specialize (D1 y Hy (Rlt_le_trans _ _ _ Hyz (Rmin_l _ _))). specialize (D2 y Hy (Rlt_le_trans _ _ _ Hyz (Rmin_r _ _))).
    assert (D1a := Rlt_le_trans _ _ _ D1 (Rmin_l _ _)). assert (D1b := Rlt_le_trans _ _ _ D1 (Rmin_r _ _)).
    replace (Phi k j y * Phi l m y - Phi k j z * Phi l m z) with (Phi k j y * (Phi l m y - Phi l m z) + (Phi k j y - Phi k j z) * Phi l m z) by ring.
    eapply Rle_lt_trans; [apply Rabs_triang|]. rewrite !Rabs_mult.
    assert (By : Rabs (Phi k j y) < p).
    { unfold p. replace (Phi k j y) with (Phi k j z + (Phi k j y - Phi k j z)) by ring. eapply Rle_lt_trans; [apply Rabs_triang|]. lra. }
    assert (T1 : Rabs (Phi k j y) * Rabs (Phi l m y - Phi l m z) <= p * (eps / (2 * p))) by (apply Rmult_le_compat; try apply Rabs_pos; lra).
    assert (T2 : Rabs (Phi k j y - Phi k j z) * Rabs (Phi l m z) < eps / (2 * q) * q).
    { apply Rle_lt_trans with (eps / (2 * q) * Rabs (Phi l m z)); [apply Rmult_le_compat_r; [apply Rabs_pos|lra]|].
      apply Rmult_lt_compat_l; [apply Rdiv_lt_0_compat; lra|unfold q; lra]. }
    replace (p * (eps / (2 * p))) with (eps / 2) in T1 by (field; lra). replace (eps / (2 * q) * q) with (eps / 2) in T2 by (field; lra). lra. }
  assert (M := mean_value det theta 1 nil 0 0 (Rlt_le _ _ L)). unfold det in *.
  assert (M' : 0 * (1 - theta) <= (Phi O O 1 * Phi 1%nat 1%nat 1 - Phi O 1%nat 1 * Phi 1%nat O 1) - (Phi O O theta * Phi 1%nat 1%nat theta - Phi O 1%nat theta * Phi 1%nat O theta) <= 0 * (1 - theta)); [|lra].
  apply M.
  - apply (continuous_plus _ (fun t => Phi O O t * Phi 1%nat 1%nat t) (fun t => - (Phi O 1%nat t * Phi 1%nat O t))); [apply P; lia|apply continuous_opposite, P; lia].
  - intros t Ht _. exists 0. split; [|lra]. destruct (Z t Ht) as [Z0 Z1].
    assert (D00 := proj2 (Fu O O ltac:(lia) ltac:(lia)) t Ht). assert (D01 := proj2 (Fu O 1%nat ltac:(lia) ltac:(lia)) t Ht).
    assert (D10 := proj2 (Fu 1%nat O ltac:(lia) ltac:(lia)) t Ht). assert (D11 := proj2 (Fu 1%nat 1%nat ltac:(lia) ltac:(lia)) t Ht).
    cbn [sum] in D00, D01, D10, D11. rewrite Z0 in D00, D01. rewrite Z1 in D10, D11.
    assert (Dm := is_derive_minus (V := R_NormedModule) _ _ t _ _ (is_derive_mult _ _ t _ _ D00 D11 Rmult_comm) (is_derive_mult _ _ t _ _ D01 D10 Rmult_comm)).
    cbn in Dm. unfold Hierarchy.minus, plus, opp, mult in Dm; cbn in Dm.
    match type of Dm with is_derive _ _ ?d => replace 0 with d by ring end. exact Dm.
Qed.

(* Stance (6): a change of state i leaves every state as it was that it does not lead on to: those outside a group that no state of it enters the rates of. *)
Theorem not_led_on (n : nat) (theta : R) (A : R -> matrix) (B : matrix) (free : R -> vector) (x y : nat -> R -> R) (i : nat) (delta : R) (group : nat -> bool) :
  theta < 1 -> (forall k l t, (k < n)%nat -> (l < n)%nat -> theta < t < 1 -> Rabs (A t k l) <= B k l) -> group i = true ->
  (forall k j t, (k < n)%nat -> (j < n)%nat -> theta < t < 1 -> group k = false -> group j = true -> A t k j = 0) ->
  changed n theta A free x y i delta -> forall k t, (k < n)%nat -> group k = false -> between theta 1 t -> y k t = x k t.
Proof.
  intros L HB Gi Z [C [D S0]] k t Hk Gk Ht.
  assert (Only : forall r v, theta < r < 1 -> forall q, (q < n)%nat -> group q = false ->
    sum n (fun j => (if group q then 0 else A r q j) * (if group j then 0 else v j)) = sum n (fun j => A r q j * v j)).
  { intros r v Hr q Hq Gq. apply sum_ext. intros j Hj. rewrite Gq. destruct (group j) eqn:Gj; [rewrite (Z q j r) by trivial|]; ring. }
  assert (E : (if group k then 0 else y k t) = (if group k then 0 else x k t)); [|now rewrite Gk in E].
  apply (unique n theta 1 (fun r q j => if group q then 0 else A r q j) B (fun r q => if group q then 0 else free r q)
    (fun q r => if group q then 0 else y q r) (fun q r => if group q then 0 else x q r) L) with (i := k); trivial.
  - intros q j r Hq Hj Hr. destruct (group q); [rewrite Rabs_R0; eapply Rle_trans; [apply Rabs_pos|now apply (HB q j r)]|now apply HB].
  - intros q Hq. destruct (group q); [split; intros z _ eps He; exists 1; (split; [lra|]); intros; rewrite Rminus_0_r, Rabs_R0; exact He|split; apply (C q Hq)].
  - intros q r Hq Hr. destruct (group q) eqn:Gq.
    + split; (rewrite sum_zero by (intros; ring)); rewrite Rplus_0_r; apply (is_derive_const (V := R_NormedModule)).
    + destruct (D q r Hq Hr) as [Dx Dy]. assert (Oy := Only r (fun j => y j r) Hr q Hq Gq). assert (Ox := Only r (fun j => x j r) Hr q Hq Gq).
      rewrite Gq in Oy, Ox. cbn in Oy, Ox. rewrite Oy, Ox. split; assumption.
  - intros q Hq. destruct (group q) eqn:Gq; trivial. rewrite (S0 q Hq).
    replace (Nat.eqb q i) with false; [ring|]. symmetry. apply Nat.eqb_neq. intros ->. congruence.
Qed.

(* Stance (6): for two states without damping and det Φ = 1 a change δ of state i at phase θ changes state k at touchdown by δ (Φ_ki(1)Φ_jj(θ) − Φ_kj(1)Φ_ji(θ)). *)
Theorem growth_of_two (theta : R) (A : R -> matrix) (B : matrix) (free : R -> vector) (Phi : nat -> nat -> R -> R) (x y : nat -> R -> R) (i j q : nat) (delta : R) :
  theta < 1 -> (forall k l t, (k < 2)%nat -> (l < 2)%nat -> theta < t < 1 -> Rabs (A t k l) <= B k l) -> fundamental 2 theta A Phi ->
  (i < 2)%nat -> j = (1 - i)%nat -> Phi i i theta * Phi j j theta - Phi i j theta * Phi j i theta = 1 ->
  changed 2 theta A free x y i delta -> (q < 2)%nat -> y q 1 - x q 1 = delta * (Phi q i 1 * Phi j j theta - Phi q j 1 * Phi j i theta).
Proof.
  intros L HB Fu Hi Ej Det [C [D S0]] Hq.
  set (z := fun k t => x k t + (delta * Phi j j theta * Phi k i t + - (delta * Phi j i theta) * Phi k j t)).
  assert (Hj : (j < 2)%nat) by lia.
  assert (E : y q 1 = z q 1).
  { apply (unique 2 theta 1 A B free y z L) with (i := q); trivial; try (unfold between; lra).
    - intros k Hk. split; [apply (C k Hk)|]. unfold z.
      apply (continuous_plus _ (x k) (fun t => delta * Phi j j theta * Phi k i t + - (delta * Phi j i theta) * Phi k j t)); [apply (C k Hk)|].
      apply (continuous_plus _ (fun t => delta * Phi j j theta * Phi k i t) (fun t => - (delta * Phi j i theta) * Phi k j t)); apply continuous_scale; now apply Fu.
    - intros k t Hk Ht. destruct (D k t Hk Ht) as [Dx Dy]. split; [exact Dy|]. unfold z.
      replace (sum 2 (fun q => A t k q * (x q t + (delta * Phi j j theta * Phi q i t + - (delta * Phi j i theta) * Phi q j t))) + free t k) with
        ((sum 2 (fun q => A t k q * x q t) + free t k) + (delta * Phi j j theta * sum 2 (fun q => A t k q * Phi q i t) + - (delta * Phi j i theta) * sum 2 (fun q => A t k q * Phi q j t))) by (cbn; ring).
      apply (is_derive_plus (V := R_NormedModule) (x k) (fun t => delta * Phi j j theta * Phi k i t + - (delta * Phi j i theta) * Phi k j t)); [exact Dx|].
      apply (is_derive_plus (V := R_NormedModule) (fun t => delta * Phi j j theta * Phi k i t) (fun t => - (delta * Phi j i theta) * Phi k j t)).
      + apply (is_derive_scal (Phi k i)). now apply Fu.
      + apply (is_derive_scal (Phi k j)). now apply Fu.
    - intros k Hk. rewrite (S0 k Hk). unfold z. f_equal.
      assert (K : k = i \/ k = j) by lia. destruct K as [->| ->].
      + rewrite Nat.eqb_refl. replace (delta * Phi j j theta * Phi i i theta + - (delta * Phi j i theta) * Phi i j theta)
          with (delta * (Phi i i theta * Phi j j theta - Phi i j theta * Phi j i theta)) by ring. rewrite Det. ring.
      + replace (Nat.eqb j i) with false by (symmetry; apply Nat.eqb_neq; lia). ring. }
  rewrite E. unfold z. ring.
Qed.

(* Stance (6): a push that grows by at most G until touchdown, with b' + G|δ| <= R and b' the error without it, leads no farther than R. *)
Theorem push_within (e e' growth g delta b r : R) : Rabs e <= b -> e' = e + g * delta -> Rabs g <= growth -> b + growth * Rabs delta <= r -> Rabs e' <= r.
Proof.
  intros E -> G L. eapply Rle_trans; [apply Rabs_triang|]. rewrite Rabs_mult.
  assert (Rabs g * Rabs delta <= growth * Rabs delta) by (apply Rmult_le_compat_r; trivial; apply Rabs_pos). lra.
Qed.

(* Stance (7): a push δ that has grown to δ g with ‖g‖ <= G, and b' + G|δ| <= R with b' the error without it, leads no farther than R in the norm. *)
Theorem push_within_norm (n m : nat) (len : vector -> R) (v : matrix) (e g : vector) (delta b r growth : R) : supported m len ->
  norm n len v e <= b -> norm n len v g <= growth -> b + growth * Rabs delta <= r ->
  norm n len v (fun i => e i + delta * g i) <= r.
Proof.
  intros S E G L. assert (Scale : len (fun i => delta * times n v g i) <= Rabs delta * len (times n v g)).
  { destruct S as [_ S]. destruct (S (fun i => delta * times n v g i)) as [c [<- H]].
    replace (dot m c _) with (delta * dot m c (times n v g)) by (unfold dot; rewrite <- sum_scale; apply sum_ext; intros; ring).
    eapply Rle_trans; [apply Rle_abs|]. rewrite Rabs_mult. apply Rmult_le_compat_l; [apply Rabs_pos|apply H]. }
  assert (T : norm n len v (fun i => e i + delta * g i) <= norm n len v e + Rabs delta * norm n len v g).
  { unfold norm. eapply Rle_trans; [|apply Rplus_le_compat_l; exact Scale]. eapply Rle_trans; [|apply (supported_triangle m); exact S].
    right. apply (supported_ext m); [exact S|]. intros i _. unfold times. rewrite <- sum_scale, <- sum_plus. apply sum_ext; intros; ring. }
  assert (P := Rmult_le_compat_l _ _ _ (Rabs_pos delta) G). lra.
Qed.

(* Stance (7): of a box, state by state: no state is led beyond its edge that is not so when it is pushed by G_i|δ|, G_i at least |g_i|. *)
Theorem push_within_box (n : nat) (e g growth b r : vector) (delta : R) : (forall i, (i < n)%nat -> Rabs (e i) <= b i /\ Rabs (g i) <= growth i) ->
  (forall i, (i < n)%nat -> b i + growth i * Rabs delta <= r i) -> forall i, (i < n)%nat -> Rabs (e i + delta * g i) <= r i.
Proof.
  intros B L i Hi. destruct (B i Hi) as [E G]. now apply (push_within (e i) _ (growth i) (g i) delta (b i) (r i)); [|ring| |apply L].
Qed.
