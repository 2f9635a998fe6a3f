(** What several states are pushed by, end up in, and come back to: proofs/several.md (4), (5), (6), (8), proofs/graph.md (5), (7), (8). *)
Require Import Reals Lra Lia FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Comparison Several.
Open Scope R_scope.

(* Several (4), stances (7): a Jacobian within h of M has ‖J e‖ >= ‖M e‖ − max ‖d‖ over |d| <= H|e|, so a gain k has k‖e‖ at least that. *)
Theorem stretched (n m' : nat) (len' : vector -> R) (v' mid h j : matrix) (k size most : R) (e : vector) : supported m' len' ->
  (forall a b, (a < n)%nat -> (b < n)%nat -> Rabs (j a b - mid a b) <= h a b) ->
  (forall d, (forall a, (a < n)%nat -> Rabs (d a) <= times n h (fun b => Rabs (e b)) a) -> norm n len' v' d <= most) ->
  norm n len' v' (times n j e) <= k * size -> norm n len' v' (times n mid e) - most <= k * size.
Proof.
  intros S Near Off K. assert (T : forall e f, norm n len' v' (fun i => e i + f i) <= norm n len' v' e + norm n len' v' f).
  { intros a b. unfold norm. eapply Rle_trans; [|apply (supported_triangle m'); exact S]. right.
    apply (supported_ext m'); [exact S|]. intros i _. unfold times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  assert (Off' := Off (fun a => times n mid e a - times n j e a)).
  assert (norm n len' v' (times n mid e) <= norm n len' v' (times n j e) + norm n len' v' (fun a => times n mid e a - times n j e a)).
  { eapply Rle_trans; [|apply T]. right. f_equal. apply functional_extensionality. intro i. ring. }
  assert (norm n len' v' (fun a => times n mid e a - times n j e a) <= most); [|lra].
  apply Off'. intros a Ha. unfold times. rewrite <- sum_minus. eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros b Hb.
  replace (mid a b * e b - j a b * e b) with (- (j a b - mid a b) * e b) by ring. rewrite Rabs_mult, Rabs_Ropp.
  apply Rmult_le_compat_r; [apply Rabs_pos|now apply Near].
Qed.

(* Several (5b): after settling, a push p of state s with β + |p|‖u_s‖ < R keeps the ball of radius R. *)
Theorem push_in_ball {W H : Type} (n m : nat) (len : vector -> R) (v : matrix) (F : vector -> W -> H -> vector) inW moves target
  (s : set (several n len v F inW moves target)) (beta r p unit_norm : R) (u : vector) : supported m len ->
  ultimate _ s beta -> norm n len v (fun i => p * u i) <= Rabs p * unit_norm -> beta + Rabs p * unit_norm < r ->
  exists N, forall x h, trajectory (several n len v F inW moves target) x h -> s (x O) (h O) ->
  forall t, (N <= t)%nat -> norm n len v (subtract (fun i => x t i + p * u i) (target (h t))) <= r.
Proof.
  intros S U Un L. destruct (U (r - Rabs p * unit_norm) ltac:(lra)) as [N HN]. exists N. intros x h T S0 t Ht.
  specialize (HN x h T S0 t Ht). cbn in HN.
  assert (G : norm n len v (subtract (fun i => x t i + p * u i) (target (h t))) <= norm n len v (subtract (x t) (target (h t))) + norm n len v (fun i => p * u i)).
  { unfold norm. eapply Rle_trans; [|apply (supported_triangle m); exact S]. right. apply (supported_ext m); [exact S|].
    intros i _. unfold times. rewrite <- sum_plus. apply sum_ext. intros; unfold subtract; ring. }
  lra.
Qed.

(* Several (5b), (5d): after settling, a push p of state s with β_s + |p| below the distance r of every target from the edges keeps the region. *)
Theorem push_in_region {W H : Type} (F : vector -> W -> H -> vector) inW moves target (s : set (state_error F inW moves target O))
  (i : nat) (beta r p lo hi : R) : ultimate (state_error F inW moves target i) s beta -> beta + Rabs p < r ->
  (forall h, lo <= target h i - r /\ target h i + r <= hi) ->
  exists N, forall x h, trajectory (state_error F inW moves target i) x h -> s (x O) (h O) ->
  forall t, (N <= t)%nat -> lo <= x t i + p <= hi.
Proof.
  intros U L E. destruct (U (r - Rabs p) ltac:(lra)) as [N HN]. exists N. intros x h T S0 t Ht.
  specialize (HN x h T S0 t Ht). cbn in HN. specialize (E (h t)). revert HN L. unfold Rabs. repeat destruct (Rcase_abs _); lra.
Qed.

(* Several (8): bounds of all states, each below β_s, make the box |e_s| <= β_s one in which every trajectory is in the end. *)
Theorem box_absorbs {W H : Type} (n : nat) (F : vector -> W -> H -> vector) inW moves target (s : set (state_error F inW moves target O))
  (bound beta : vector) : (forall i, (i < n)%nat -> ultimate (state_error F inW moves target i) s (bound i)) ->
  (forall i, (i < n)%nat -> bound i < beta i) ->
  ends_in (state_error F inW moves target O) s (fun x h => forall i, (i < n)%nat -> Rabs (x i - target h i) <= beta i).
Proof.
  intros U L. induction n as [|n IH]; [exists O; intros; lia|].
  destruct IH as [N A]; [intros; apply U; lia|intros; apply L; lia|].
  destruct (U n ltac:(lia) (beta n) (L n ltac:(lia))) as [N' B].
  exists (N + N')%nat. intros x h T S0 t Ht i Hi. destruct (Nat.eq_dec i n) as [->|Ni].
  - left. apply (B x h); trivial. lia.
  - apply (A x h T S0 t); lia.
Qed.

(* Stances (5): from bounds b_i of |V' e| in every stance, any number above Σ_i |L'_xi| b_i bounds the error of state x in the end. *)
Theorem state_in_stances (stances n : nat) (size : nat -> nat) (l v : nat -> matrix) (b : nat -> vector) (i : nat) (b' : nat -> R) :
  (forall s, (s < stances)%nat -> left_inverse n (size s) (l s) (v s)) -> (i < n)%nat ->
  (forall s, (s < stances)%nat -> sum (size s) (fun a => Rabs (l s i a) * b s a) < b' s) ->
  exists c : nat -> vector, (forall s a, (s < stances)%nat -> (a < size s)%nat -> b s a < c s a) /\
  forall s e, (s < stances)%nat -> (forall a, (a < size s)%nat -> Rabs (times n (v s) e a) < c s a) -> Rabs (e i) < b' s.
Proof.
  intros E Hi Hb.
  set (q := fun s => sum (size s) (fun a => Rabs (l s i a))).
  assert (Hq : forall s, 0 <= q s) by (intro; apply sum_nonneg; intros; apply Rabs_pos).
  set (room := fun s => b' s - sum (size s) (fun a => Rabs (l s i a) * b s a)).
  assert (Hr : forall s, (s < stances)%nat -> 0 < room s) by (intros s Hs; unfold room; specialize (Hb s Hs); lra).
  exists (fun s a => b s a + room s / (q s + 1)). split.
  - intros s a Hs _. specialize (Hr s Hs). specialize (Hq s). assert (0 < room s / (q s + 1)) by (apply Rdiv_lt_0_compat; lra). lra.
  - intros s e Hs Y. rewrite <- (recovered n (size s) (l s) (v s) e i (E s Hs) Hi).
    apply Rle_lt_trans with (sum (size s) (fun a => Rabs (l s i a) * b s a) + q s * (room s / (q s + 1))).
    + unfold q. rewrite <- sum_scale_r, <- sum_plus. eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros a Ha.
      rewrite Rabs_mult, <- Rmult_plus_distr_l. apply Rmult_le_compat_l; [apply Rabs_pos|]. left. now apply Y.
    + specialize (Hr s Hs). specialize (Hq s).
      assert (q s * (room s / (q s + 1)) < room s); [|unfold room in *; lra].
      replace (room s) with ((q s + 1) * (room s / (q s + 1))) at 2 by (field; lra).
      assert (0 < room s / (q s + 1)) by (apply Rdiv_lt_0_compat; lra). lra.
Qed.

(** Orbits by contraction: a map g that brings points of a closed set nearer to each other, in a norm that bounds every entry. *)
Fixpoint repeated (g : vector -> vector) (x : vector) (k : nat) : vector := match k with O => x | S k => g (repeated g x k) end.

(** Closed under limits entry by entry. *)
Definition closed_under_limits (n : nat) (c : vector -> Prop) : Prop := forall (x : nat -> vector) (y : vector),
  (forall k, c (x k)) -> (forall i, (i < n)%nat -> Un_cv (fun k => x k i) (y i)) -> c y.

Lemma geometric_sum k m c : 0 <= c < 1 -> (1 - c) * sum m (fun i => c ^ (k + i)) <= c ^ k.
Proof.
  intro Hc. assert (E : (1 - c) * sum m (fun i => c ^ (k + i)) = c ^ k - c ^ (k + m)).
  { induction m as [|m IH]; [cbn; rewrite Nat.add_0_r; ring|]. cbn [sum]. rewrite Rmult_plus_distr_l, IH.
    replace (k + S m)%nat with (S (k + m)) by lia. cbn. ring. }
  rewrite E. assert (0 <= c ^ (k + m)) by (apply pow_le; lra). lra.
Qed.

(* Several (6), Banach: if g maps the closed set c into itself and contracts by κ < 1 there, and ‖g(x) − x‖ <= δ, some fixed point is within δ/(1 − κ) of x. *)
Theorem fixed_point_nearby (n m : nat) (len : vector -> R) (l v : matrix) (g : vector -> vector) (c : vector -> Prop) (kappa delta : R) (x : vector) :
  len = largest m \/ len = euclidean m -> left_inverse n m l v -> 0 <= kappa < 1 -> closed_under_limits n c ->
  (forall y, c y -> c (g y)) -> (forall y z, c y -> c z -> norm n len v (subtract (g y) (g z)) <= kappa * norm n len v (subtract y z)) ->
  c x -> norm n len v (subtract (g x) x) <= delta ->
  exists y, c y /\ (forall i, (i < n)%nat -> g y i = y i) /\ norm n len v (subtract y x) <= delta / (1 - kappa).
Proof.
  intros T E Hk Cl Gc Con Cx Dx. set (nm := norm n len v).
  assert (Su : supported m len) by (destruct T as [->| ->]; [apply largest_supported|apply euclidean_supported]).
  destruct (metric_is_norm n m len l v T E) as [Zero [Tri Hom]]. fold nm in Zero, Tri.
  assert (Hom' : forall e c, nm (fun i => c * e i) = Rabs c * nm e) by exact Hom. clear Hom. rename Hom' into Hom.
  assert (Ext : forall a b, (forall i, (i < n)%nat -> a i = b i) -> nm a = nm b).
  { intros a b Q. unfold nm, norm. apply (supported_ext m); trivial. intros i _. apply times_ext. trivial. }
  assert (Pos : forall a, 0 <= nm a) by (intro; apply Su).
  assert (Nothing : forall a, (forall i, (i < n)%nat -> a i = 0) -> nm a = 0).
  { intros a A. transitivity (nm (fun i => 0 * a i)); [apply Ext; intros i Hi; rewrite (A i Hi); ring|].
    rewrite Hom, Rabs_R0. ring. }
  (* every entry is bounded by the norm, and the norm by the entries *)
  assert (Pr : exists sg, 0 <= sg /\ forall a i, (i < n)%nat -> Rabs (a i) <= sg * nm a).
  { assert (Each : forall i, (i < n)%nat -> exists sg, 0 <= sg /\ forall a, Rabs (a i) <= sg * nm a).
    { intros i Hi. destruct T as [->| ->].
      - exists (sum m (fun k => Rabs (l i k))). split; [apply sum_nonneg; intros; apply Rabs_pos|].
        intro a. now apply (projection_largest n m l v a i).
      - exists (sqrt (sum m (fun k => l i k * l i k))). split; [apply sqrt_pos|]. intro a. now apply (projection_euclidean n m l v a i). }
    clearbody nm. clear -Each Pos. induction n as [|q IH]; [exists 0; split; [lra|intros; lia]|].
    destruct IH as [s1 [P1 A1]]; [intros; apply Each; lia|]. destruct (Each q ltac:(lia)) as [s2 [P2 A2]].
    exists (s1 + s2). split; [lra|]. intros a i Hi. specialize (Pos a). destruct (Nat.eq_dec i q) as [->|N].
    - specialize (A2 a). nra.
    - specialize (A1 a i ltac:(lia)). nra. }
  destruct Pr as [sg [Hsg Pr]].
  assert (Nm : forall a eps, (forall i, (i < n)%nat -> Rabs (a i) <= eps) -> 0 <= eps ->
    nm a <= sum n (fun i => nm (fun j => if Nat.eqb j i then 1 else 0)) * eps).
  { intros a eps A He.
    assert (Part : forall q, (q <= n)%nat -> nm (fun j => if Nat.ltb j q then a j else 0) <= sum q (fun i => nm (fun j => if Nat.eqb j i then 1 else 0)) * eps).
    { induction q as [|q IH]; intro Hq.
      - rewrite Nothing by reflexivity. cbn. lra.
      - cbn [sum]. rewrite Rmult_plus_distr_r.
        apply Rle_trans with (nm (fun j => (if Nat.ltb j q then a j else 0) + (fun j => a q * (if Nat.eqb j q then 1 else 0)) j)).
        + right. apply Ext. intros j Hj. destruct (Nat.ltb_spec j (S q)), (Nat.ltb_spec j q), (Nat.eqb_spec j q); subst; try lia; ring.
        + eapply Rle_trans; [apply Tri|]. apply Rplus_le_compat; [apply IH; lia|].
          rewrite Hom, Rmult_comm. apply Rmult_le_compat_l; [apply Pos|apply A; lia]. }
    eapply Rle_trans; [|apply (Part n (le_n n))]. right. apply Ext. intros j Hj. apply Nat.ltb_lt in Hj. now rewrite Hj. }
  set (xs := repeated g x). assert (In : forall k, c (xs k)) by (induction k; [exact Cx|now apply Gc]).
  assert (D0 : 0 <= delta) by (eapply Rle_trans; [apply Pos|exact Dx]).
  assert (Step : forall k, nm (subtract (xs (S k)) (xs k)) <= kappa ^ k * delta).
  { induction k as [|k IH]; [rewrite pow_O, Rmult_1_l; exact Dx|].
    eapply Rle_trans; [apply (Con (xs (S k)) (xs k)); apply In|]. cbn [pow]. rewrite Rmult_assoc. apply Rmult_le_compat_l; [lra|exact IH]. }
  assert (Far : forall k q, nm (subtract (xs (k + q)%nat) (xs k)) <= kappa ^ k * (delta / (1 - kappa))).
  { intros k q. apply Rle_trans with (delta * sum q (fun i => kappa ^ (k + i))).
    - induction q as [|q IH].
      + rewrite Nat.add_0_r, Nothing by (intros; unfold subtract; ring). cbn. lra.
      + replace (k + S q)%nat with (S (k + q)) by lia. cbn [sum]. rewrite Rmult_plus_distr_l.
        apply Rle_trans with (nm (fun j => subtract (xs (k + q)%nat) (xs k) j + subtract (xs (S (k + q))) (xs (k + q)%nat) j)).
        * right. apply Ext. intros; unfold subtract; ring.
        * eapply Rle_trans; [apply Tri|]. apply Rplus_le_compat; [exact IH|]. rewrite (Rmult_comm delta). apply Step.
    - assert (Gs := geometric_sum k q kappa Hk).
      apply (Rmult_le_reg_l (1 - kappa)); [lra|]. replace ((1 - kappa) * (kappa ^ k * (delta / (1 - kappa)))) with (delta * kappa ^ k) by (field; lra).
      apply (Rmult_le_compat_l delta) in Gs; trivial. lra. }
  assert (Cau : forall i, (i < n)%nat -> {y | Un_cv (fun k => xs k i) y}).
  { intros i Hi. apply Rcomplete.R_complete. intros eps He.
    assert (Q : 0 <= delta / (1 - kappa)) by (apply Rmult_le_pos; [trivial|left; apply Rinv_0_lt_compat; lra]).
    destruct (pow_lt_1_zero kappa ltac:(rewrite Rabs_pos_eq; lra) (eps / (2 * (sg * (delta / (1 - kappa)) + 1)))) as [N HN].
    { apply Rdiv_lt_0_compat; nra. }
    exists N. assert (One : forall k, (N <= k)%nat -> Rabs (xs k i - xs N i) < eps / 2).
    { intros k Hkn. replace k with (N + (k - N))%nat by lia. specialize (HN N (le_n N)). rewrite Rabs_pos_eq in HN by (apply pow_le; lra).
      eapply Rle_lt_trans; [apply (Pr (subtract (xs (N + (k - N))%nat) (xs N)) i Hi)|].
      assert (F := Far N (k - N)%nat). set (D := delta / (1 - kappa)) in *.
      apply (Rmult_le_compat_l sg) in F; trivial. eapply Rle_lt_trans; [exact F|].
      assert (P : 0 < 2 * (sg * D + 1)) by nra. apply (Rmult_lt_compat_r (2 * (sg * D + 1))) in HN; trivial.
      replace (eps / (2 * (sg * D + 1)) * (2 * (sg * D + 1))) with eps in HN by (field; nra).
      assert (0 <= kappa ^ N) by (apply pow_le; lra). nra. }
    intros a b Ha Hb. unfold R_dist. replace (xs a i - xs b i) with ((xs a i - xs N i) - (xs b i - xs N i)) by ring.
    assert (A1 := One a Ha). assert (A2 := One b Hb). revert A1 A2. unfold Rabs. repeat destruct (Rcase_abs _); lra. }
  assert (Lim : exists y : vector, forall i, (i < n)%nat -> Un_cv (fun k => xs k i) (y i)).
  { exists (fun i => match lt_dec i n with left p => proj1_sig (Cau i p) | right _ => 0 end).
    intros i Hi. destruct (lt_dec i n) as [p|]; [|lia]. apply (proj2_sig (Cau i p)). }
  destruct Lim as [y Lim]. assert (Cy : c y) by (apply (Cl xs y); trivial).
  set (K := sum n (fun i => nm (fun j => if Nat.eqb j i then 1 else 0))).
  assert (HK : 0 <= K) by (apply sum_nonneg; intros; apply Pos).
  assert (Near : forall eps, 0 < eps -> exists N, forall k, (N <= k)%nat -> nm (subtract y (xs k)) <= eps).
  { intros eps He. assert (Each : exists N, forall k, (N <= k)%nat -> forall i, (i < n)%nat -> Rabs (y i - xs k i) <= eps / (K + 1)).
    { clear -Lim He HK. assert (P : 0 < eps / (K + 1)) by (apply Rdiv_lt_0_compat; lra). clearbody K. 
      induction n as [|q IH]; [exists O; intros; lia|]. destruct IH as [N A]; [intros; apply Lim; lia|].
      destruct (Lim q ltac:(lia) _ P) as [N' B]. exists (N + N')%nat. intros k Hkn i Hi.
      destruct (Nat.eq_dec i q) as [->|Ni]; [|apply A; lia]. specialize (B k ltac:(lia)). unfold R_dist in B.
      rewrite Rabs_minus_sym. lra. }
    destruct Each as [N A]. exists N. intros k Hkn.
    assert (P : 0 < eps / (K + 1)) by (apply Rdiv_lt_0_compat; lra).
    eapply Rle_trans; [apply (Nm _ (eps / (K + 1))); [intros; now apply A|lra]|]. fold K.
    replace eps with ((K + 1) * (eps / (K + 1))) at 2 by (field; lra). lra. }
  exists y. split; [exact Cy|]. split.
  - (* g y is as near to every g(x_k) as one likes *)
    intros i Hi. assert (Z : nm (subtract (g y) y) = 0).
    { apply Rle_antisym; [|apply Pos]. apply le_epsilon. intros eps He. rewrite Rplus_0_l.
      destruct (Near (eps / 2) ltac:(lra)) as [N A].
      apply Rle_trans with (nm (fun j => subtract (g y) (g (xs N)) j + (fun j => -1 * subtract y (xs (S N)) j) j)).
      - right. apply Ext. intros; unfold subtract, xs; cbn; ring.
      - eapply Rle_trans; [apply Tri|]. rewrite Hom. replace (Rabs (-1)) with 1 by (rewrite Rabs_left; lra). rewrite Rmult_1_l.
        assert (A1 := A (S N) ltac:(lia)). assert (A2 := A N ltac:(lia)). assert (A3 := Con y (xs N) Cy (In N)). fold nm in A3.
        assert (P := Pos (subtract y (xs N))). nra. }
    assert (Q := Zero _ Z i Hi). unfold subtract in Q. lra.
  - apply le_epsilon. intros eps He. destruct (Near eps He) as [N A]. specialize (A N (le_n N)).
    apply Rle_trans with (nm (fun j => subtract (xs (0 + N)%nat) (xs O) j + subtract y (xs N) j)).
    + right. apply Ext. intros; unfold subtract, xs; cbn; ring.
    + eapply Rle_trans; [apply Tri|]. assert (F := Far O N). rewrite pow_O, Rmult_1_l in F. lra.
Qed.

(* Without κ < 1 a round that leads nearly back shows nothing: x + δ brings points no nearer, and has no fixed point. *)
Example no_fixed_point_at_gain_one (delta : R) : 0 < delta -> (forall x y, Rabs ((x + delta) - (y + delta)) <= 1 * Rabs (x - y)) /\
  forall x, x + delta <> x.
Proof. intro P. split; [intros x y; right; rewrite Rmult_1_l; f_equal; ring|]. intros x E. lra. Qed.

(** A round of maps g_0, …, g_{p−1}. *)
Fixpoint round (g : nat -> vector -> vector) (p : nat) (x : vector) : vector := match p with O => x | S p => g p (round g p x) end.

(* Several (6), horizon (5): a round of p maps that each contract by k >= 0 within a set they keep contracts by kᵖ, and stays in it. *)
Theorem round_contracts (nm : vector -> R) (g : nat -> vector -> vector) (c : vector -> Prop) (k : R) (p : nat) : 0 <= k ->
  (forall j y, c y -> c (g j y)) -> (forall j y z, c y -> c z -> nm (subtract (g j y) (g j z)) <= k * nm (subtract y z)) ->
  forall y z, c y -> c z -> c (round g p y) /\ nm (subtract (round g p y) (round g p z)) <= k ^ p * nm (subtract y z).
Proof.
  intros Hk K Con y z Cy Cz.
  assert (In : forall q x, c x -> c (round g q x)) by (induction q; cbn; auto).
  split; [now apply In|]. induction p as [|p IH]; cbn [round pow]; [lra|].
  eapply Rle_trans; [apply Con; now apply In|]. rewrite Rmult_assoc. now apply Rmult_le_compat_l.
Qed.

(* Stances (8): maps that lead from the set of each stance into that of the next, with gains k_j >= 0 from norm to norm: p of them contract by k_1 ⋯ k_p. *)
Theorem round_through_stances (nm : nat -> vector -> R) (c : nat -> vector -> Prop) (g : nat -> vector -> vector) (k : nat -> R) (p : nat) :
  (forall j, 0 <= k j) -> (forall j y, c j y -> c (S j) (g j y)) ->
  (forall j y z, c j y -> c j z -> nm (S j) (subtract (g j y) (g j z)) <= k j * nm j (subtract y z)) ->
  forall y z, c O y -> c O z -> c p (round g p y) /\ nm p (subtract (round g p y) (round g p z)) <= gains k p * nm O (subtract y z).
Proof.
  intros Hk K Con y z Cy Cz.
  assert (In : forall q x, c O x -> c q (round g q x)) by (induction q; cbn; auto).
  split; [now apply In|]. induction p as [|p IH]; cbn [round gains]; [lra|].
  eapply Rle_trans; [apply Con; now apply In|]. rewrite Rmult_assoc. now apply Rmult_le_compat_l.
Qed.

(* Several (6): states of an orbit no farther than ρ from those followed have errors of at least |e_s(x_j)| − σ_s ρ. *)
Theorem error_along_orbit (nm : vector -> R) (s : nat) (sigma rho : R) (x y target : vector) :
  0 <= sigma -> (forall e, Rabs (e s) <= sigma * nm e) -> nm (subtract y x) <= rho ->
  Rabs (x s - target s) - sigma * rho <= Rabs (y s - target s).
Proof.
  intros Hs P N. specialize (P (subtract y x)). apply (Rmult_le_compat_l sigma) in N; trivial. unfold subtract in P at 1.
  revert P. unfold Rabs. repeat destruct (Rcase_abs _); lra.
Qed.
