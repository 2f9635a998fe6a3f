(** Comparison for linear differential equations: proofs/trajectory.md (2). *)
Require Import Reals Lra Lia List.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors.
Open Scope R_scope.

Lemma falling (f : R -> R) a b : a <= b -> continuous_over (between a b) f ->
  (forall t, a < t < b -> exists d, is_derive f t d /\ d <= 0) -> f b <= f a.
Proof.
  intros L C D. destruct L as [L|<-]; [|lra].
  destruct (mean_smooth f a b (fun d => d <= 0) L C) as [d [P E]]; [intros t Ht _; now apply D|]. nra.
Qed.

Lemma bounded_on (f : R -> R) a b : a <= b -> continuous_over (between a b) f -> exists c, forall t, between a b t -> f t <= c.
Proof.
  intros L C. destruct (continuity_ab_maj (fun t => f (clip a b t)) a b L) as [x [Hx _]].
  - intros t _. now apply continuous_clip.
  - exists (f (clip a b x)). intros t Ht. specialize (Hx t Ht). now rewrite clip_same in Hx.
Qed.

Lemma all_bounded n (f : nat -> R -> R) a b : a <= b -> (forall i, (i < n)%nat -> continuous_over (between a b) (f i)) ->
  exists c, 0 <= c /\ forall i, (i < n)%nat -> forall t, between a b t -> f i t <= c.
Proof.
  intros L C. induction n as [|n IH]; [exists 0; split; [lra|intros; lia]|].
  destruct IH as [c [P A]]; [auto with arith|]. destruct (bounded_on (f n) a b L (C n ltac:(lia))) as [c' B].
  exists (Rmax c c'). split; [eapply Rle_trans; [exact P|apply Rmax_l]|]. intros i Hi t Ht.
  destruct (Nat.eq_dec i n) as [->|N]; [eapply Rle_trans; [now apply B|apply Rmax_r]|].
  eapply Rle_trans; [apply A; trivial; lia|apply Rmax_l].
Qed.

Lemma continuous_plus (s : R -> Prop) (f g : R -> R) : continuous_over s f -> continuous_over s g -> continuous_over s (fun t => f t + g t).
Proof.
  intros C D x Hx eps He. destruct (C x Hx (eps / 2) ltac:(lra)) as [d [Hd A]]. destruct (D x Hx (eps / 2) ltac:(lra)) as [e [Hp B]].
  exists (Rmin d e). split; [now apply Rmin_glb_lt|]. intros y Hy L.
  specialize (A y Hy (Rlt_le_trans _ _ _ L (Rmin_l _ _))). specialize (B y Hy (Rlt_le_trans _ _ _ L (Rmin_r _ _))).
  replace (f y + g y - (f x + g x)) with ((f y - f x) + (g y - g x)) by ring.
  eapply Rle_lt_trans; [apply Rabs_triang|]. lra.
Qed.

Lemma derivable_continuous (s : R -> Prop) (f : R -> R) : (forall t, s t -> exists d, is_derive f t d) -> continuous_over s f.
Proof.
  intros D t Ht eps He. destruct (D t Ht) as [l Hl].
  assert (Cp : continuity_pt f t) by (apply derivable_continuous_pt; exists l; now apply is_derive_Reals).
  destruct (Cp eps He) as [d [Hd Q]]. exists d. split; [exact Hd|]. intros y _ Hy.
  destruct (Req_dec y t) as [->|N]; [rewrite Rminus_diag_eq, Rabs_R0; trivial|].
  apply (Q y). split; [split; [exact I|auto]|exact Hy].
Qed.

Section Comparison.
Variables (n : nat) (a b : R) (B : matrix) (w : vector) (u z : nat -> R -> R).

(** u' = M u + v with |M_ij| <= B_ij and |v_i| <= w_i, at every time between a and b. *)
Definition solves : Prop := forall i, (i < n)%nat -> continuous_over (between a b) (u i) /\
  forall t, a < t < b -> exists m v, is_derive (u i) t (sum n (fun j => m j * u j t) + v) /\
    (forall j, (j < n)%nat -> Rabs (m j) <= B i j) /\ Rabs v <= w i.

(** z' >= B z + w. *)
Definition above : Prop := forall i, (i < n)%nat -> continuous_over (between a b) (z i) /\
  forall t, a < t < b -> exists d, is_derive (z i) t d /\ sum n (fun j => B i j * z j t) + w i <= d.

Lemma halved (l c : R) : a <= b -> solves -> above -> 0 <= c -> 0 < l ->
  (forall i, (i < n)%nat -> 2 * sum n (fun j => B i j) <= l) -> (forall i, (i < n)%nat -> Rabs (u i a) <= z i a) ->
  (forall i j, (i < n)%nat -> (j < n)%nat -> 0 <= B i j) ->
  (forall i t, (i < n)%nat -> between a b t -> Rabs (u i t) - z i t <= c * exp (l * (t - a))) ->
  forall i t, (i < n)%nat -> between a b t -> Rabs (u i t) - z i t <= c / 2 * exp (l * (t - a)).
Proof.
  intros L Su Az Hc Hl Row U0 HB G i t Hi Ht. destruct (Su i Hi) as [Cu Du]. destruct (Az i Hi) as [Cz Dz].
  set (g := fun sign s => sign * u i s - z i s - c / 2 * exp (l * (s - a))).
  assert (E : forall sign, sign = 1 \/ sign = -1 -> g sign t <= g sign a).
  { intros sign Sg. apply falling; [apply Ht| |].
    - unfold g. apply (continuous_sub (between a b)); [unfold between in *; intros; lra|].
      apply (continuous_plus _ (fun s => sign * u i s - z i s) (fun s => - (c / 2 * exp (l * (s - a))))).
      + apply (continuous_plus _ (fun s => sign * u i s) (fun s => - z i s)); [now apply continuous_scale|now apply continuous_opposite].
      + apply derivable_continuous. intros s _. eexists. auto_derive; [exact I|reflexivity].
    - intros s Hs. destruct Ht as [Ht1 Ht2]. destruct (Du s ltac:(lra)) as [m [v [D1 [M V]]]]. destruct (Dz s ltac:(lra)) as [d [D2 P]].
      exists (sign * (sum n (fun j => m j * u j s) + v) - d - c / 2 * (l * exp (l * (s - a)))). split.
      + unfold g. apply (is_derive_minus (V := R_NormedModule) (fun s => sign * u i s - z i s) (fun s => c / 2 * exp (l * (s - a)))).
        * apply (is_derive_minus (V := R_NormedModule) (fun s => sign * u i s) (z i)); [now apply (is_derive_scal (u i))|exact D2].
        * auto_derive; [exact I|unfold Rminus; ring].
      + set (x := exp (l * (s - a))) in *. assert (X : 0 < x) by apply exp_pos.
        assert (A : sign * (sum n (fun j => m j * u j s) + v) <= sum n (fun j => B i j * Rabs (u j s)) + w i).
        { assert (Q : Rabs (sum n (fun j => m j * u j s) + v) <= sum n (fun j => B i j * Rabs (u j s)) + w i).
          { eapply Rle_trans; [apply Rabs_triang|]. apply Rplus_le_compat; trivial. eapply Rle_trans; [apply sum_abs|].
            apply sum_le. intros j Hj. rewrite Rabs_mult. apply Rmult_le_compat_r; [apply Rabs_pos|now apply M]. }
          apply Rabs_ends in Q. destruct Sg as [->| ->]; lra. }
        assert (A' : sum n (fun j => B i j * Rabs (u j s)) <= sum n (fun j => B i j * z j s) + sum n (fun j => B i j) * (c * x)).
        { rewrite <- sum_scale_r, <- sum_plus. apply sum_le. intros j Hj. rewrite <- Rmult_plus_distr_l.
          apply Rmult_le_compat_l; [now apply HB|]. specialize (G j s Hj ltac:(unfold between; lra)). fold x in G. lra. }
        assert (R' := Row i Hi). assert (c * x * (2 * sum n (fun j => B i j)) <= c * x * l) by (apply Rmult_le_compat_l; nra).
        lra. }
  assert (Z := U0 i Hi). assert (E0 : exp (l * (a - a)) = 1) by (rewrite Rminus_diag_eq, Rmult_0_r by reflexivity; apply exp_0).
  assert (E1 := E 1 (or_introl eq_refl)). assert (E2 := E (-1) (or_intror eq_refl)). unfold g in E1, E2. rewrite E0 in E1, E2.
  apply Rabs_ends in Z. unfold Rabs. destruct (Rcase_abs (u i t)); lra.
Qed.

(* (2) If u' = M u + v, |M| <= B, |v| <= w entry by entry, |u(a)| <= z(a) and z' >= B z + w, then |u| <= z throughout. *)
Theorem comparison_of_solutions : a <= b -> solves -> above -> (forall i j, (i < n)%nat -> (j < n)%nat -> 0 <= B i j) ->
  (forall i, (i < n)%nat -> Rabs (u i a) <= z i a) -> forall i t, (i < n)%nat -> between a b t -> Rabs (u i t) <= z i t.
Proof.
  intros L Su Az HB U0.
  set (l := 2 * sum n (fun i => sum n (fun j => B i j)) + 1).
  assert (Row0 : forall i, (i < n)%nat -> 0 <= sum n (fun j => B i j)) by (intros i Hi; apply sum_nonneg; auto).
  assert (Row : forall i, (i < n)%nat -> 2 * sum n (fun j => B i j) <= l).
  { intros i Hi. assert (Q := sum_term n (fun i => sum n (fun j => B i j)) i Hi Row0). cbv beta in Q. unfold l. lra. }
  assert (Hl : 0 < l) by (unfold l; assert (0 <= sum n (fun i => sum n (fun j => B i j))) by (now apply sum_nonneg); lra).
  destruct (all_bounded n (fun i t => Rabs (u i t) - z i t) a b L) as [c [Hc Bd]].
  { intros i Hi. apply (continuous_plus _ (fun t => Rabs (u i t)) (fun t => - z i t)).
    - intros x Hx eps He. destruct (proj1 (Su i Hi) x Hx eps He) as [d [Hd D]]. exists d. split; trivial. intros y Hy Hyx.
      eapply Rle_lt_trans; [apply Rabs_triang_inv2|now apply D].
    - apply continuous_opposite, (Az i Hi). }
  assert (Half : forall k i t, (i < n)%nat -> between a b t -> Rabs (u i t) - z i t <= c * (1 / 2) ^ k * exp (l * (t - a))).
  { induction k as [|k IH]; intros i t Hi Ht.
    - rewrite pow_O, Rmult_1_r. eapply Rle_trans; [now apply Bd|].
      assert (1 <= exp (l * (t - a))); [|nra]. assert (Q := exp_ineq1_le (l * (t - a))). destruct Ht. nra.
    - replace (c * (1 / 2) ^ S k) with (c * (1 / 2) ^ k / 2) by (cbn; field).
      apply halved; trivial. apply Rmult_le_pos; [trivial|apply pow_le; lra]. }
  intros i t Hi Ht. apply Rnot_lt_le. intro N. set (x := exp (l * (t - a))) in *.
  assert (X : 0 < x) by apply exp_pos. assert (P : 0 < Rabs (u i t) - z i t) by lra.
  destruct (pow_lt_1_zero (1 / 2) ltac:(rewrite Rabs_pos_eq; lra) ((Rabs (u i t) - z i t) / (c * x + 1))) as [K HK].
  { apply Rdiv_lt_0_compat; nra. }
  specialize (HK K (le_n K)). rewrite Rabs_pos_eq in HK by (apply pow_le; lra). specialize (Half K i t Hi Ht). fold x in Half.
  assert (Q : 0 <= c * x) by nra. apply (Rmult_lt_compat_r (c * x + 1)) in HK; [|lra].
  replace ((Rabs (u i t) - z i t) / (c * x + 1) * (c * x + 1)) with (Rabs (u i t) - z i t) in HK by (field; lra).
  assert (0 < (1 / 2) ^ K) by (apply pow_lt; lra). nra.
Qed.
End Comparison.

(* (2), one state: |u(s)| <= exp(2B)|u(−1)| + (exp(2B) − 1)/B w at s = 1, and at most that before. *)
Theorem comparison_of_one (u : R -> R) (B w : R) : 0 < B -> 0 <= w -> continuous_over (between (-1) 1) u ->
  (forall t, -1 < t < 1 -> exists m v, is_derive u t (m * u t + v) /\ Rabs m <= B /\ Rabs v <= w) ->
  forall t, between (-1) 1 t -> Rabs (u t) <= exp (2 * B) * Rabs (u (-1)) + (exp (2 * B) - 1) / B * w.
Proof.
  intros HB Hw C D t Ht.
  set (z := fun t => exp (B * (t + 1)) * Rabs (u (-1)) + (exp (B * (t + 1)) - 1) / B * w).
  assert (Q : Rabs (u t) <= z t).
  { apply (comparison_of_solutions 1 (-1) 1 (fun _ _ => B) (fun _ => w) (fun _ => u) (fun _ => z) ltac:(lra)) with (i := O); trivial; try lia; try (intros; lra).
    - intros i _. split; [exact C|]. intros s Hs. destruct (D s Hs) as [m [v [D1 [M V]]]]. exists (fun _ => m), v. cbn.
      rewrite Rplus_0_l. auto.
    - intros i _. split.
      + apply derivable_continuous. intros s _. unfold z. eexists. auto_derive; [repeat split; lra|reflexivity].
      + intros s _. exists (B * exp (B * (s + 1)) * Rabs (u (-1)) + exp (B * (s + 1)) * w). split.
        * unfold z. auto_derive; [repeat split; lra|field; lra].
        * cbn. unfold z. right. field. lra.
    - intros i _. unfold z. replace (-1 + 1) with 0 by ring. rewrite Rmult_0_r, exp_0. lra. }
  eapply Rle_trans; [exact Q|]. unfold z.
  assert (E : exp (B * (t + 1)) <= exp (2 * B)).
  { destruct Ht as [_ [Ht| ->]]; [left; apply exp_increasing; nra|right; f_equal; ring]. }
  apply Rplus_le_compat; [apply Rmult_le_compat_r; trivial; apply Rabs_pos|].
  apply Rmult_le_compat_r; trivial. apply Rmult_le_compat_r; [left; now apply Rinv_0_lt_compat|]. lra.
Qed.

(** Powers added up, as far as they go, and what is added for the rest; s = (t + 1)/2 runs from 0 to 1. *)
Section Powers.
Variables (n K : nat) (B : matrix) (W : nat -> matrix) (rest : R).

Definition powers (s : R) : matrix := fun i j => sum K (fun q => s ^ S q * W (S q) i j) + rest * s ^ S K.
Definition rising (s : R) : matrix := fun i j => / 2 * (sum K (fun q => INR (S q) * s ^ q * W (S q) i j) + rest * (INR (S K) * s ^ K)).

Lemma powers_derive i j t : is_derive (fun t => powers ((t + 1) / 2) i j) t (rising ((t + 1) / 2) i j).
Proof.
  assert (P : forall q c, is_derive (fun t => ((t + 1) / 2) ^ S q * c) t (/ 2 * (INR (S q) * ((t + 1) / 2) ^ q * c))).
  { intros q c. auto_derive; [exact I|]. change (INR (S q)) with (match q with O => 1 | S _ => INR q + 1 end).
    unfold Rdiv. ring. }
  unfold powers, rising. rewrite Rmult_plus_distr_l, <- sum_scale.
  apply (is_derive_plus (V := R_NormedModule)).
  - apply (is_derive_sum K (fun q t => ((t + 1) / 2) ^ S q * W (S q) i j)). intros q _. apply P.
  - apply (is_derive_ext (fun t => ((t + 1) / 2) ^ S K * rest)); [intros; apply Rmult_comm|].
    replace (/ 2 * (rest * (INR (S K) * ((t + 1) / 2) ^ K))) with (/ 2 * (INR (S K) * ((t + 1) / 2) ^ K * rest)) by ring. apply P.
Qed.

(** W_1 >= 2, (k + 1) W_{k+1} >= 2 B W_k, no entry of W_K above the rest, and K + 1 >= 4‖B‖. *)
Definition added_up : Prop := (0 < K)%nat /\ 0 <= rest /\ (forall i j, 0 <= B i j) /\ (forall k i j, 0 <= W k i j) /\
  (forall i j, (if Nat.eqb i j then 2 else 0) <= W 1%nat i j) /\
  (forall k i j, (0 < k < K)%nat -> (i < n)%nat -> (j < n)%nat -> 2 * product n B (W k) i j <= INR (S k) * W (S k) i j) /\
  (forall i j, (i < n)%nat -> (j < n)%nat -> W K i j <= rest) /\ (forall i, (i < n)%nat -> 4 * sum n (fun j => B i j) <= INR (S K)).

Lemma rises s i j : added_up -> 0 <= s <= 1 -> (i < n)%nat -> (j < n)%nat ->
  (if Nat.eqb i j then 1 else 0) + product n B (powers s) i j <= rising s i j.
Proof.
  intros [HK [Hr [HB [HW [H1 [Hn [HL Row]]]]]]] Hs Hi Hj.
  assert (Ps : forall k, 0 <= s ^ k) by (intro; apply pow_le; lra).
  assert (E : product n B (powers s) i j = sum K (fun q => s ^ S q * product n B (W (S q)) i j) + rest * s ^ S K * sum n (fun l => B i l)).
  { unfold product, powers.
    rewrite (sum_ext n _ (fun l => sum K (fun q => s ^ S q * (B i l * W (S q) l j)) + rest * s ^ S K * B i l)).
    - rewrite sum_plus, sum_scale, sum_swap. f_equal. apply sum_ext. intros q _. now rewrite sum_scale.
    - intros l _. rewrite Rmult_plus_distr_l, <- sum_scale. f_equal; [apply sum_ext; intros; ring|ring]. }
  rewrite E. unfold rising. destruct K as [|k]; [lia|].
  (* the first of the rising powers against 1, each further one against the power before it, the rest against the last *)
  assert (First : forall f, sum (S k) f = f O + sum k (fun q => f (S q))).
  { clear. induction k as [|k IH]; intro f; [cbn; ring|]. change (sum (S (S k)) f) with (sum (S k) f + f (S k)). rewrite IH. cbn. ring. }
  rewrite (First (fun q => INR (S q) * s ^ q * W (S q) i j)). cbn [sum].
  assert (A : (if Nat.eqb i j then 1 else 0) <= / 2 * (INR 1 * s ^ 0 * W 1%nat i j)).
  { specialize (H1 i j). cbn. destruct (Nat.eqb i j); lra. }
  assert (C : sum k (fun q => s ^ S q * product n B (W (S q)) i j) <= / 2 * sum k (fun q => INR (S (S q)) * s ^ S q * W (S (S q)) i j)).
  { rewrite <- sum_scale. apply sum_le. intros q Hq. specialize (Hn (S q) i j ltac:(lia) Hi Hj). specialize (Ps (S q)).
    assert (G := Rmult_le_compat_l (s ^ S q) _ _ Ps Hn). lra. }
  assert (D : s ^ S k * product n B (W (S k)) i j + rest * s ^ S (S k) * sum n (fun l => B i l) <= / 2 * (rest * (INR (S (S k)) * s ^ S k))).
  { set (rho := sum n (fun l => B i l)) in *. assert (P : 0 <= rho) by (apply sum_nonneg; intros; apply HB).
    assert (G : product n B (W (S k)) i j <= rho * rest).
    { unfold product, rho. rewrite <- sum_scale_r. apply sum_le. intros l Hl. apply Rmult_le_compat_l; auto. }
    assert (G' := Rmult_le_compat_l (s ^ S k) _ _ (Ps (S k)) G). specialize (Row i Hi). fold rho in Row.
    assert (Q : s ^ S (S k) <= s ^ S k) by (change (s ^ S (S k)) with (s * s ^ S k); specialize (Ps (S k)); nra).
    assert (Z : 0 <= rest * rho) by now apply Rmult_le_pos.
    assert (G2 : rest * rho * s ^ S (S k) <= rest * rho * s ^ S k) by now apply Rmult_le_compat_l.
    assert (Z2 : 0 <= rest * s ^ S k) by (apply Rmult_le_pos; trivial).
    assert (G3 : rest * s ^ S k * (4 * rho) <= rest * s ^ S k * INR (S (S k))) by now apply Rmult_le_compat_l. lra. }
  lra.
Qed.
End Powers.

(* (2) as it is computed: with F >= Σ_{k <= K} W_k and the rest, |u(t)| <= (1 + B F)|u(−1)| + F w on [−1, 1]. *)
Theorem comparison_by_powers (n K : nat) (B F : matrix) (W : nat -> matrix) (rest : R) (w : vector) (u : nat -> R -> R) :
  added_up n K B W rest -> (forall i, 0 <= w i) -> solves n (-1) 1 B w u ->
  (forall i j, (i < n)%nat -> (j < n)%nat -> sum K (fun q => W (S q) i j) + rest <= F i j) ->
  forall i t, (i < n)%nat -> between (-1) 1 t ->
  Rabs (u i t) <= Rabs (u i (-1)) + times n B (times n F (fun j => Rabs (u j (-1)))) i + times n F w i.
Proof.
  intros Ad Hw Su HF i t Hi Ht. assert (Ad' := Ad). destruct Ad' as [HK [Hr [HB [HW _]]]].
  set (x := fun j => Rabs (u j (-1))). assert (Hx : forall j, 0 <= x j) by (intro; apply Rabs_pos).
  set (G := fun t => powers K W rest ((t + 1) / 2)). set (D := fun t => rising K W rest ((t + 1) / 2)).
  set (z := fun i t => x i + times n B (times n (G t) x) i + times n (G t) w i).
  assert (Dt : forall y i t, is_derive (fun t => times n (G t) y i) t (times n (D t) y i)).
  { intros y k s. unfold times. apply (is_derive_sum n (fun j t => G t k j * y j)). intros j _.
    apply (is_derive_ext (fun t => y j * G t k j)); [intros; apply Rmult_comm|]. rewrite Rmult_comm.
    apply (is_derive_scal (fun t => G t k j)). apply powers_derive. }
  assert (Dz : forall k s, is_derive (z k) s (times n B (times n (D s) x) k + times n (D s) w k)).
  { intros k s. unfold z. apply (is_derive_plus (V := R_NormedModule)); [|apply Dt].
    replace (times n B (times n (D s) x) k) with (0 + times n B (times n (D s) x) k) by ring.
    apply (is_derive_plus (V := R_NormedModule)); [apply (is_derive_const (V := R_NormedModule))|].
    unfold times at 1 3. apply (is_derive_sum n (fun j t => B k j * times n (G t) x j)). intros j _.
    apply (is_derive_scal (fun t => times n (G t) x j)). apply Dt. }
  assert (Up : forall y s k, (forall j, 0 <= y j) -> -1 <= s <= 1 -> (k < n)%nat -> y k + times n B (times n (G s) y) k <= times n (D s) y k).
  { intros y s k Hy Hs Hk. rewrite times_times. unfold times.
    assert (E : y k = sum n (fun j => (if Nat.eqb k j then 1 else 0) * y j)).
    { rewrite (sum_single n _ k Hk); [rewrite Nat.eqb_refl; ring|]. intros j _ N. apply not_eq_sym, Nat.eqb_neq in N. rewrite N. ring. }
    rewrite E at 1. rewrite <- sum_plus. apply sum_le. intros j Hj. rewrite <- Rmult_plus_distr_r.
    apply Rmult_le_compat_r; trivial. apply (rises n K B W rest); trivial. lra. }
  assert (Q : Rabs (u i t) <= z i t).
  { apply (comparison_of_solutions n (-1) 1 B w u z ltac:(lra) Su); trivial.
    - intros k Hk. split; [apply derivable_continuous; intros s _; eexists; apply Dz|].
      intros s Hs. eexists. split; [apply Dz|].
      assert (U1 : forall j, (j < n)%nat -> x j + times n B (times n (G s) x) j <= times n (D s) x j) by (intros; apply Up; trivial; lra).
      assert (U2 := Up w s k Hw ltac:(lra) Hk).
      assert (E : sum n (fun j => B k j * z j s) <= times n B (times n (D s) x) k + times n B (times n (G s) w) k).
      { unfold times at 1 3. rewrite <- sum_plus. apply sum_le. intros j Hj. rewrite <- Rmult_plus_distr_l.
        apply Rmult_le_compat_l; [apply HB|]. unfold z. specialize (U1 j Hj). lra. }
      lra.
    - intros k Hk. unfold z, G. replace ((-1 + 1) / 2) with 0 by field. change (Rabs (u k (-1))) with (x k).
      assert (Pos : forall y, (forall j, 0 <= y j) -> forall k, 0 <= times n (powers K W rest 0) y k).
      { intros y Hy q. apply sum_nonneg. intros j _. apply Rmult_le_pos; trivial. unfold powers.
        apply Rplus_le_le_0_compat; [|apply Rmult_le_pos; trivial; apply pow_le; lra].
        apply sum_nonneg. intros; apply Rmult_le_pos; trivial; apply pow_le; lra. }
      assert (P1 := Pos w Hw k). assert (P2 : 0 <= times n B (times n (powers K W rest 0) x) k).
      { apply sum_nonneg. intros; apply Rmult_le_pos; [apply HB|now apply Pos]. } lra. }
  eapply Rle_trans; [exact Q|]. unfold z.
  assert (Le : forall y, (forall j, 0 <= y j) -> forall k, (k < n)%nat -> times n (G t) y k <= times n F y k).
  { intros y Hy k Hk. apply sum_le. intros j Hj. apply Rmult_le_compat_r; trivial. eapply Rle_trans; [|now apply HF].
    unfold G, powers. destruct Ht as [T1 T2].
    assert (Pw : forall q, 0 <= ((t + 1) / 2) ^ q <= 1).
    { intro q. split; [apply pow_le; lra|].
      assert (P1 := pow_incr ((t + 1) / 2) 1 q ltac:(lra)). now rewrite pow1 in P1. }
    apply Rplus_le_compat.
    - apply sum_le. intros q _. rewrite <- (Rmult_1_l (W (S q) k j)) at 2. apply Rmult_le_compat_r; [apply HW|apply Pw].
    - rewrite <- (Rmult_1_r rest) at 2. apply Rmult_le_compat_l; [exact Hr|apply Pw]. }
  apply Rplus_le_compat; [apply Rplus_le_compat_l|now apply Le].
  apply sum_le. intros j Hj. apply Rmult_le_compat_l; [apply HB|now apply Le].
Qed.

(* (2) The rate is at most B u* + w wherever |u| <= u*. *)
Theorem rate_of_solution (n : nat) (m v u top : vector) (B : matrix) (w : vector) (i : nat) :
  (forall j, (j < n)%nat -> Rabs (m j) <= B i j) -> Rabs (v i) <= w i -> (forall j, (j < n)%nat -> Rabs (u j) <= top j) ->
  Rabs (sum n (fun j => m j * u j) + v i) <= times n B top i + w i.
Proof.
  intros M V U. eapply Rle_trans; [apply Rabs_triang|]. apply Rplus_le_compat; trivial.
  apply (times_near n (fun _ => m) B u top i); trivial.
Qed.

(* (1) With Y' = h(A Y + β) + d stated and y' = h(A y + β) true, e = y − Y has e' = h A e − d: the setting of (2), where |h A| <= B and |d| <= w. *)
Theorem defect (n : nat) (a b h : R) (A : R -> matrix) (beta : R -> vector) (B : matrix) (w : vector) (y Y d : nat -> R -> R) :
  (forall i, (i < n)%nat -> continuous_over (between a b) (y i) /\ continuous_over (between a b) (Y i)) ->
  (forall i t, (i < n)%nat -> a < t < b -> is_derive (y i) t (h * (sum n (fun j => A t i j * y j t) + beta t i)) /\
    is_derive (Y i) t (h * (sum n (fun j => A t i j * Y j t) + beta t i) + d i t)) ->
  (forall i j t, (i < n)%nat -> (j < n)%nat -> a < t < b -> Rabs (h * A t i j) <= B i j) ->
  (forall i t, (i < n)%nat -> a < t < b -> Rabs (d i t) <= w i) -> solves n a b B w (fun i t => y i t - Y i t).
Proof.
  intros C D HB Hd i Hi. split.
  - apply (continuous_plus _ (y i) (fun t => - Y i t)); [apply (C i Hi)|apply continuous_opposite, (C i Hi)].
  - intros t Ht. destruct (D i t Hi Ht) as [Dy DY]. exists (fun j => h * A t i j), (- d i t). split; [|split].
    + replace (sum n (fun j => h * A t i j * (y j t - Y j t)) + - d i t) with
        (h * (sum n (fun j => A t i j * y j t) + beta t i) - (h * (sum n (fun j => A t i j * Y j t) + beta t i) + d i t)).
      * apply (is_derive_minus (V := R_NormedModule) (y i) (Y i)); assumption.
      * rewrite (sum_ext n (fun j => h * A t i j * (y j t - Y j t)) (fun j => h * (A t i j * y j t) - h * (A t i j * Y j t))) by (intros; ring).
        rewrite sum_minus, !sum_scale. ring.
    + intros j Hj. now apply HB.
    + rewrite Rabs_Ropp. now apply Hd.
Qed.

(* (5) A later piece starts off by at most |Y(−1) − Y⁻(1)|, Y⁻ of the piece before, plus the bound for that piece. *)
Theorem piece_start (y Y before err : R) : Rabs (y - before) <= err -> Rabs (y - Y) <= Rabs (Y - before) + err.
Proof. unfold Rabs. repeat destruct (Rcase_abs _); lra. Qed.

(* (4) For a function smooth around [c − ρ, c + ρ] with |f^(K)|/K! <= b there, the Taylor polynomial of K terms is off by at most b ρ^K. *)
Theorem taylor_remainder (f : R -> R) (K : nat) (c rho wider b v : R) : 0 <= rho < wider ->
  (forall t, c - wider < t < c + wider -> forall k, (k <= S K)%nat -> ex_derive_n f k t) ->
  (forall t, c - rho <= t <= c + rho -> Rabs (Derive_n f (S K) t) / INR (fact (S K)) <= b) -> Rabs v <= rho ->
  Rabs (f (c + v) - sum_f_R0 (fun k => v ^ k / INR (fact k) * Derive_n f k c) K) <= b * rho ^ S K.
Proof.
  intros Hr D B V. apply Rabs_ends in V. assert (Fp : forall k, 0 < INR (fact k)) by (intro; apply INR_fact_lt_0).
  assert (B0 : 0 <= b).
  { eapply Rle_trans; [|apply (B c); lra]. apply Rmult_le_pos; [apply Rabs_pos|left; apply Rinv_0_lt_compat, Fp]. }
  assert (Last : forall z u, c - rho <= z <= c + rho -> 0 <= u <= rho -> Rabs (u ^ S K / INR (fact (S K)) * Derive_n f (S K) z) <= b * rho ^ S K).
  { intros z u Hz Hu. unfold Rdiv. rewrite !Rabs_mult, (Rabs_pos_eq (u ^ S K)) by (apply pow_le; lra).
    rewrite (Rabs_pos_eq (/ _)) by (left; apply Rinv_0_lt_compat, Fp). specialize (B z Hz). unfold Rdiv in B.
    assert (P : u ^ S K <= rho ^ S K) by (apply pow_incr; lra). assert (P0 : 0 <= u ^ S K) by (apply pow_le; lra).
    rewrite Rmult_assoc, (Rmult_comm (/ _)), (Rmult_comm b). apply Rmult_le_compat; trivial.
    apply Rmult_le_pos; [apply Rabs_pos|left; apply Rinv_0_lt_compat, Fp]. }
  destruct (Rtotal_order v 0) as [Neg|[->|Pos]].
  - (* f(−t) from −c up *)
    assert (Loc : forall t k, c - wider < t < c + wider -> (k <= S K)%nat -> locally t (fun y => forall j, (j <= k)%nat -> ex_derive_n f j y)).
    { intros t k Ht Hk. assert (Hm : 0 < Rmin (t - (c - wider)) (c + wider - t)) by (apply Rmin_glb_lt; lra).
      exists (mkposreal _ Hm). intros y Hy j Hj. apply D; [|lia].
      assert (H3 := Rmin_l (t - (c - wider)) (c + wider - t)). assert (H4 := Rmin_r (t - (c - wider)) (c + wider - t)).
      unfold ball in Hy; cbn in Hy; unfold AbsRing_ball, abs, minus, plus, opp in Hy; cbn in Hy. apply Rabs_def2 in Hy. lra. }
    destruct (Taylor_Lagrange (fun t => f (- t)) K (- c) (- c - v) ltac:(lra)) as [z [Hz E]].
    { intros t Ht k Hk. apply ex_derive_n_comp_opp. apply Loc; [lra|exact Hk]. }
    cbv beta in E. replace (- (- c - v)) with (c + v) in E by ring. replace (- c - v - - c) with (- v) in E by ring. rewrite E.
    rewrite (Derive_n_comp_opp f (S K) z) by (apply Loc; [lra|lia]).
    rewrite (sum_eq _ (fun k => v ^ k / INR (fact k) * Derive_n f k c)).
    2:{ intros k Hk. rewrite (Derive_n_comp_opp f k (- c)) by (apply Loc; [rewrite Ropp_involutive; lra|lia]).
        rewrite Ropp_involutive. replace ((- v) ^ k) with ((-1) ^ k * v ^ k) by (rewrite <- Rpow_mult_distr; f_equal; ring).
        assert (Sq : (-1) ^ k * (-1) ^ k = 1) by (rewrite <- Rpow_mult_distr; replace (-1 * -1) with 1 by ring; apply pow1).
        unfold Rdiv. replace ((-1) ^ k * v ^ k * / INR (fact k) * ((-1) ^ k * Derive_n f k c)) with ((-1) ^ k * (-1) ^ k * (v ^ k * / INR (fact k) * Derive_n f k c)) by ring.
        rewrite Sq. ring. }
    match goal with |- Rabs (?a + ?r - ?a) <= _ => replace (a + r - a) with r by ring end.
    assert (L := Last (- z) (- v) ltac:(lra) ltac:(lra)).
    replace ((- v) ^ S K / INR (fact (S K)) * ((-1) ^ S K * Derive_n f (S K) (- z))) with ((-1) ^ S K * ((- v) ^ S K / INR (fact (S K)) * Derive_n f (S K) (- z))) by ring.
    rewrite Rabs_mult, pow_1_abs, Rmult_1_l. exact L.
  - rewrite Rplus_0_r. replace (sum_f_R0 _ K) with (f c).
    + rewrite Rminus_diag_eq, Rabs_R0 by reflexivity. apply Rmult_le_pos; [exact B0|apply pow_le; lra].
    + clear. induction K as [|K IH]; [cbn; field|]. cbn [sum_f_R0]. rewrite <- IH. rewrite pow_ne_zero by lia. unfold Rdiv. ring.
  - destruct (Taylor_Lagrange f K c (c + v) ltac:(lra)) as [z [Hz E]].
    { intros t Ht k Hk. apply D; [lra|exact Hk]. }
    replace (c + v - c) with v in E by ring. rewrite E.
    match goal with |- Rabs (?a + ?r - ?a) <= _ => replace (a + r - a) with r by ring end. apply Last; lra.
Qed.

(* Stance (3): x' = A x + b from s is Σ_j Φ_ij s_j + Φ_i0, Φ the solutions of x' = A x from unit vectors, Φ_0 of x' = A x + b from 0. *)
Theorem flow (n : nat) (a b : R) (A : R -> matrix) (B : matrix) (free : R -> vector) (Phi : nat -> nat -> R -> R) (Phi0 x : nat -> R -> R) (s : vector) :
  a < b -> (forall i j t, (i < n)%nat -> (j < n)%nat -> a < t < b -> Rabs (A t i j) <= B i j) ->
  (forall i, (i < n)%nat -> continuous_over (between a b) (x i) /\ continuous_over (between a b) (Phi0 i) /\
    forall j, (j < n)%nat -> continuous_over (between a b) (Phi i j)) ->
  (forall i t, (i < n)%nat -> a < t < b -> is_derive (x i) t (sum n (fun k => A t i k * x k t) + free t i) /\
    is_derive (Phi0 i) t (sum n (fun k => A t i k * Phi0 k t) + free t i) /\
    forall j, (j < n)%nat -> is_derive (Phi i j) t (sum n (fun k => A t i k * Phi k j t))) ->
  (forall i, (i < n)%nat -> x i a = s i /\ Phi0 i a = 0 /\ forall j, (j < n)%nat -> Phi i j a = if Nat.eqb i j then 1 else 0) ->
  forall i t, (i < n)%nat -> between a b t -> x i t = sum n (fun j => Phi i j t * s j) + Phi0 i t.
Proof.
  intros L HB C D S0 i t Hi Ht.
  set (u := fun i t => x i t - (sum n (fun j => Phi i j t * s j) + Phi0 i t)).
  assert (Z : Rabs (u i t) <= 0).
  { apply (comparison_of_solutions n a b B (fun _ => 0) u (fun _ _ => 0) (Rlt_le _ _ L)) with (i := i); trivial.
    - intros k Hk. destruct (C k Hk) as [Cx [C0 Cp]]. split.
      + apply (continuous_plus _ (x k) (fun t => - (sum n (fun j => Phi k j t * s j) + Phi0 k t))); trivial.
        apply continuous_opposite. apply (continuous_plus _ (fun t => sum n (fun j => Phi k j t * s j)) (Phi0 k)); trivial.
        apply (continuous_sum _ n (fun j t => Phi k j t * s j)). intros j Hj y Hy eps He.
        destruct (continuous_scale _ _ (s j) (Cp j Hj) y Hy eps He) as [dl [Hd Q]]. exists dl. split; trivial.
        intros z Hz Hzy. specialize (Q z Hz Hzy). now rewrite !(Rmult_comm (Phi k j _)).
      + intros r Hr. destruct (D k r Hk Hr) as [Dx [D0 Dp]]. exists (A r k), 0. split; [|split; [intros j Hj; now apply HB|rewrite Rabs_R0; lra]].
        replace (sum n (fun j => A r k j * u j r) + 0) with
          ((sum n (fun q => A r k q * x q r) + free r k) - (sum n (fun j => sum n (fun q => A r k q * Phi q j r) * s j) + (sum n (fun q => A r k q * Phi0 q r) + free r k))).
        * apply (is_derive_minus (V := R_NormedModule) (x k) (fun t => sum n (fun j => Phi k j t * s j) + Phi0 k t)); [exact Dx|].
          apply (is_derive_plus (V := R_NormedModule) (fun t => sum n (fun j => Phi k j t * s j)) (Phi0 k)); [|exact D0].
          apply (is_derive_sum n (fun j t => Phi k j t * s j)). intros j Hj.
          apply (is_derive_ext (fun t => s j * Phi k j t)); [intros; apply Rmult_comm|]. rewrite Rmult_comm.
          apply (is_derive_scal (Phi k j)). now apply Dp.
        * assert (E : sum n (fun j => sum n (fun q => A r k q * Phi q j r) * s j) = sum n (fun q => A r k q * sum n (fun j => Phi q j r * s j))).
          { rewrite (sum_ext n _ (fun j => sum n (fun q => A r k q * Phi q j r * s j))) by (intros; now rewrite <- sum_scale_r).
            rewrite sum_swap. apply sum_ext. intros q _. rewrite <- sum_scale. apply sum_ext; intros; ring. }
          rewrite E. unfold u. rewrite (sum_ext n (fun j => A r k j * (x j r - _)) (fun j => A r k j * x j r - (A r k j * sum n (fun q => Phi j q r * s q) + A r k j * Phi0 j r))) by (intros; ring).
          rewrite sum_minus, sum_plus. ring.
    - intros k Hk. split.
      + intros y _ eps He. exists 1. split; [lra|]. intros. now rewrite Rminus_0_r, Rabs_R0.
      + intros r Hr. exists 0. split; [apply (is_derive_const (V := R_NormedModule))|]. rewrite sum_zero by (intros; ring). lra.
    - intros k j Hk Hj. eapply Rle_trans; [apply Rabs_pos|apply (HB k j ((a + b) / 2)); trivial; lra].
    - intros k Hk. destruct (S0 k Hk) as [E1 [E2 E3]]. unfold u. rewrite E1, E2.
      rewrite (sum_single n _ k Hk); [rewrite E3, Nat.eqb_refl by trivial; replace (s k - (1 * s k + 0)) with 0 by ring; rewrite Rabs_R0; lra|].
      intros j Hj N. rewrite E3 by trivial. apply not_eq_sym, Nat.eqb_neq in N. rewrite N. ring. }
  assert (P := Rabs_pos (u i t)). assert (E : Rabs (u i t) = 0) by lra. apply Rabs_eq_0 in E. unfold u in E. lra.
Qed.

(* A bound by the positive part of M would not do: u_1' = −u_2, u_2' = −u_1 has no positive entry, and grows as exp. *)
Example positive_part_is_not_enough :
  let u (i : nat) t := match i with O => exp t | _ => - exp t end in
  (forall t, is_derive (u O) t (- u 1%nat t) /\ is_derive (u 1%nat) t (- u O t)) /\ ~ (Rabs (u O 1) <= Rabs (u O 0)).
Proof.
  intro u. split.
  - intro t. split; unfold u; auto_derive; trivial; ring.
  - unfold u. rewrite exp_0, Rabs_R1, Rabs_pos_eq by (left; apply exp_pos). assert (Q := exp_ineq1 1 ltac:(lra)). lra.
Qed.
