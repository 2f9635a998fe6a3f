(** Several states, and stances that follow one another: proofs/several.md, proofs/matrix.md (6), proofs/graph.md. *)
Require Import Reals Lra Lia List FunctionalExtensionality.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Leaves Comparison.
Open Scope R_scope.

(* (1a) If R σ_s <= min(p_s − a_s, b_s − q_s) for every s, the ball of radius R about any target in [p, q] lies in [a, b]. *)
Theorem ball_of_metric (n : nat) (nm : vector -> R) (sigma a b p q t x : vector) (r : R) : 
  (forall e s, (s < n)%nat -> Rabs (e s) <= sigma s * nm e) -> (forall s, (s < n)%nat -> 0 <= sigma s) ->
  (forall s, (s < n)%nat -> p s <= t s <= q s /\ r * sigma s <= Rmin (p s - a s) (b s - q s)) ->
  nm (subtract x t) <= r -> forall s, (s < n)%nat -> a s <= x s <= b s.
Proof.
  intros P Q T E s Hs. destruct (T s Hs) as [B M]. specialize (P (subtract x t) s Hs). specialize (Q s Hs).
  assert (A1 := Rmin_l (p s - a s) (b s - q s)). assert (A2 := Rmin_r (p s - a s) (b s - q s)).
  apply (Rmult_le_compat_l (sigma s)) in E; trivial. unfold subtract in P at 1. apply Rabs_ends in P. lra.
Qed.

(* (1b) V square: a ball of radius R reaches as far as R σ_s along state s, σ_s = Σ |L_sk|. *)
Theorem ball_reaches (n : nat) (l v : matrix) (s : nat) (r : R) : left_inverse n n l v -> left_inverse n n v l ->
  (s < n)%nat -> 0 <= r -> exists e, norm n (largest n) v e <= r /\ e s = r * sum n (fun k => Rabs (l s k)).
Proof.
  intros E E' Hs Hr. set (y := fun k => r * (if Rle_dec 0 (l s k) then 1 else -1)). exists (times n l y). split.
  - unfold norm. apply largest_le; trivial. intros i Hi. rewrite (recovered n n v l y i E' Hi). unfold y.
    apply Rabs_le_between. destruct (Rle_dec 0 (l s i)); lra.
  - unfold times, y. rewrite <- sum_scale. apply sum_ext. intros k Hk. unfold Rabs.
    destruct (Rle_dec 0 (l s k)), (Rcase_abs (l s k)); lra.
Qed.

(* (1b) Likewise with the Euclidean length, σ_s = √(Σ L_sk²). *)
Theorem ball_reaches_euclidean (n : nat) (l v : matrix) (s : nat) (r : R) : left_inverse n n l v -> left_inverse n n v l ->
  (s < n)%nat -> 0 <= r -> exists e, norm n (euclidean n) v e <= r /\ e s = r * sqrt (sum n (fun k => l s k * l s k)).
Proof.
  intros E E' Hs Hr. set (q := sqrt (sum n (fun k => l s k * l s k))).
  assert (Q : q * q = sum n (fun k => l s k * l s k)) by (apply sqrt_sqrt, sum_nonneg; intros; nra).
  assert (P : 0 <= q) by apply sqrt_pos. destruct (Req_dec q 0) as [Z|Z].
  - exists (times n l (fun _ => 0)). rewrite Z, Rmult_0_r. split; [|apply sum_zero; intros; ring].
    unfold norm. rewrite (supported_ext n (euclidean n) _ (fun _ => 0) (euclidean_supported n)).
    + unfold euclidean, dot. rewrite sum_zero by (intros; ring). rewrite sqrt_0. exact Hr.
    + intros i Hi. now apply (recovered n n v l).
  - set (y := fun k => r / q * l s k). exists (times n l y). split.
    + unfold norm. rewrite (supported_ext n (euclidean n) _ y (euclidean_supported n)) by (intros i Hi; now apply (recovered n n v l)).
      unfold euclidean, dot, y. rewrite (sum_ext n _ (fun k => r / q * (r / q) * (l s k * l s k))) by (intros; ring).
      rewrite sum_scale, <- Q. replace (r / q * (r / q) * (q * q)) with (r * r) by (field; exact Z). rewrite sqrt_square; lra.
    + unfold times, y. rewrite (sum_ext n _ (fun k => r / q * (l s k * l s k))) by (intros; ring). rewrite sum_scale, <- Q. field. exact Z.
Qed.

(* (2), stances (2): ‖V_t J L_s‖ <= k on the way from the target to x, and misses of m and movements of d: gain k, residual m + d. *)
Theorem step_pair (n m m' : nat) (len len' : vector -> R) (v v' : matrix) (f : vector -> vector) (js : matrix -> Prop)
  (k miss d : R) (x before after after' : vector) : supported m' len' ->
  (forall j, js j -> forall e, norm n len' v' (times n j e) <= k * norm n len v e) -> jacobians n f js x before ->
  norm n len' v' (subtract (f before) after) <= miss -> norm n len' v' (subtract after after') <= d ->
  norm n len' v' (subtract (f x) after') <= k * norm n len v (subtract x before) + (miss + d).
Proof.
  intros S K J M D. assert (G := mean_value_norm n m m' len len' v v' f js k S K x before J).
  assert (T : forall e f, norm n len' v' (fun i => e i + f i) <= norm n len' v' e + norm n len' v' f).
  { intros a b. unfold norm. eapply Rle_trans; [|apply (supported_triangle m'); exact S]. right.
    apply (supported_ext m'); [exact S|]. intros i _. unfold times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  replace (subtract (f x) after') with
    (fun i => subtract (f x) (f before) i + (fun i => subtract (f before) after i + subtract after after' i) i).
  - eapply Rle_trans; [apply T|]. assert (T' := T (subtract (f before) after) (subtract after after')). lra.
  - apply functional_extensionality. intro i. unfold subtract. ring.
Qed.

(** Split: how F departs from its nominal gait N, M e + (F − N), and what N misses where it ought to lead, with the correction on the target. *)
Definition departs (n : nat) (mirror : matrix) (f nominal : vector -> vector) (before y : vector) : vector :=
  fun i => times n mirror (subtract y before) i + (f y i - nominal y i).
Definition kept_by_gait (n : nat) (mirror : matrix) (f nominal : vector -> vector) (before after x : vector) : vector :=
  fun i => nominal x i - after i - times n mirror (subtract x before) i + (f before i - nominal before i).

(* Split (3): G = M e + F − N, less what it is at the target, plus the next target and the residual r at x: this map is F at x, misses r at the target, and has the Jacobians of G. *)
Theorem split_apart (n : nat) (mirror : matrix) (f nominal : vector -> vector) (js : matrix -> Prop) (x before after : vector) :
  let g := departs n mirror f nominal before in let r := kept_by_gait n mirror f nominal before after x in
  let told y : vector := fun i => g y i - g before i + (r i + after i) in
  jacobians n g js x before -> told x = f x /\ subtract (told before) after = r /\ jacobians n told js x before.
Proof.
  intros g r told [C [cuts D]].
  assert (Z : forall i, times n mirror (subtract before before) i = 0).
  { intro i. unfold times, subtract. apply sum_zero. intros; ring. }
  split; [|split].
  - apply functional_extensionality. intro i. unfold told, g, r, departs, kept_by_gait. rewrite Z. ring.
  - apply functional_extensionality. intro i. unfold told, subtract. ring.
  - split.
    + intros i Hi y Hy eps He. destruct (C i Hi y Hy eps He) as [d [Hd B]]. exists d. split; trivial. intros z Hz L.
      specialize (B z Hz L). unfold told.
      replace (g (on x before z) i - g before i + (r i + after i) - (g (on x before y) i - g before i + (r i + after i)))
        with (g (on x before z) i - g (on x before y) i) by ring. exact B.
    + exists cuts. intros t Ht N. destruct (D t Ht N) as [j [J P]]. exists j. split; trivial. intros i Hi. unfold told.
      replace (times n j (subtract x before) i) with (minus (times n j (subtract x before) i) 0 + 0)
        by (unfold minus, plus, opp; cbn; ring).
      apply (is_derive_plus (V := R_NormedModule) (fun t => g (on x before t) i - g before i) (fun _ => r i + after i)).
      * apply (is_derive_minus (V := R_NormedModule) (fun t => g (on x before t) i) (fun _ => g before i)); [now apply P|].
        apply (is_derive_const (V := R_NormedModule)).
      * apply (is_derive_const (V := R_NormedModule)).
Qed.

(* Split (3): slopes of M e + F − N of at most k from norm to norm, residuals of at most m, movements of at most d: gain k, residual m + d. *)
Theorem split_step (n m m' : nat) (len len' : vector -> R) (v v' mirror : matrix) (f nominal : vector -> vector)
  (js : matrix -> Prop) (k miss d : R) (x before after after' : vector) : supported m' len' ->
  (forall j, js j -> forall e, norm n len' v' (times n j e) <= k * norm n len v e) ->
  jacobians n (departs n mirror f nominal before) js x before ->
  norm n len' v' (kept_by_gait n mirror f nominal before after x) <= miss -> norm n len' v' (subtract after after') <= d ->
  norm n len' v' (subtract (f x) after') <= k * norm n len v (subtract x before) + (miss + d).
Proof.
  intros S K J M D. destruct (split_apart n mirror f nominal js x before after J) as [E [T J']]. rewrite <- E.
  apply (step_pair n m m' len len' v v' (fun y i => departs n mirror f nominal before y i
    - departs n mirror f nominal before before i + (kept_by_gait n mirror f nominal before after x i + after i))
    js k miss d x before after after' S K J'); [|exact D]. cbv zeta in T. rewrite T. exact M.
Qed.

(* How the gait keeps the state at the target alone says nothing: it doubles every error, and the correction takes one of the two away. *)
Example kept_at_the_target_alone :
  let F (x : R) := x in let N (x : R) := 2 * x in
  (forall x, Rabs (x + (F x - N x)) <= 0 * Rabs x) /\ N 0 - 0 + (F 0 - N 0) = 0 /\ ~ (forall x, Rabs (F x) <= 0 * Rabs x + 0).
Proof.
  intros F N. unfold F, N. repeat split.
  - intro x. replace (x + (x - 2 * x)) with 0 by ring. rewrite Rabs_R0. lra.
  - ring.
  - intro Q. specialize (Q 1). rewrite Rabs_R1 in Q. lra.
Qed.

Definition several {W H : Type} (n : nat) (len : vector -> R) (v : matrix) (F : vector -> W -> H -> vector) (inW : W -> Prop)
  (moves : H -> H -> Prop) (target : H -> vector) :=
  Model vector W H F inW moves (fun x h => norm n len v (subtract x (target h))).

(* (2) Over a set with k < 1: after n steps at most kⁿ‖e_0‖ + eps(1 − kⁿ)/(1 − k), and |e_s| below any b > σ_s eps/(1 − k) in the end. *)
Theorem bound_by_state {W H : Type} (n : nat) (len : vector -> R) (v : matrix) (F : vector -> W -> H -> vector) inW moves target
  (s : set (several n len v F inW moves target)) (k eps sigma : R) (i : nat) :
  0 <= k < 1 -> 0 <= eps -> kept _ s -> bounded _ s -> pair _ s k eps ->
  0 <= sigma -> (forall e, Rabs (e i) <= sigma * norm n len v e) ->
  ultimate (Model vector W H F inW moves (fun x h => Rabs (x i - target h i))) s (sigma * (eps / (1 - k))).
Proof.
  intros Hk He K B P Hs Pr b Hb. assert (U := ultimate_bound _ s k eps Hk He K B P).
  destruct Hs as [Hs|<-].
  - destruct (U (b / sigma)) as [N HN].
    { apply (Rmult_lt_reg_l sigma); trivial. replace (sigma * (b / sigma)) with b by (field; lra). exact Hb. }
    exists N. intros x h T S0 t Ht. cbn. specialize (HN x h T S0 t Ht). cbn in HN.
    eapply Rle_lt_trans; [apply (Pr (subtract (x t) (target (h t))))|].
    apply (Rmult_lt_compat_l sigma) in HN; trivial. replace (sigma * (b / sigma)) with b in HN by (field; lra). exact HN.
  - exists O. intros x h T S0 t _. cbn. specialize (Pr (subtract (x t) (target (h t)))). unfold subtract in Pr at 1. lra.
Qed.

(** Comparison in a basis: y = V e, L V = 1 before a step, V' after it; N = V' J L + Z, Z V = 0. *)
Definition seen (n m : nat) (v' j l z : matrix) : matrix := fun a b => product n (product n v' j) l a b + z a b.

Lemma seen_times n m l v v' j z e i : left_inverse n m l v -> (forall a b, (b < n)%nat -> product m z v a b = 0) ->
  times m (seen n m v' j l z) (times n v e) i = times n v' (times n j e) i.
Proof.
  intros E Z. transitivity (times m (product n (product n v' j) l) (times n v e) i + times m z (times n v e) i).
  { unfold seen, times. rewrite <- sum_plus. apply sum_ext; intros; ring. }
  rewrite (times_times m n z v e). replace (times n (product m z v) e i) with 0.
  2:{ symmetry. apply sum_zero. intros b Hb. rewrite Z by trivial. ring. }
  rewrite Rplus_0_r, <- (times_times n m (product n v' j) l). rewrite (times_times n n v' j e).
  apply times_ext. intros b Hb. now apply recovered with (m := m).
Qed.

(** What the lines show: entries of N within h of [mid], of V' times the miss F(x*, w) − x* within r of c; the target of state s moves by d_s. *)
Definition entries (n m m' : nat) (l v v' z : matrix) (js : matrix -> Prop) (mid h : matrix) : Prop :=
  left_inverse n m l v /\ (forall a b, (b < n)%nat -> product m z v a b = 0) /\
  forall j, js j -> forall a b, (a < m')%nat -> (b < m)%nat -> Rabs (seen n m v' j l z a b - mid a b) <= h a b.

(* (3), matrix (6), stances (5): |y⁺ − g⁺| <= K|y − g| + eps, K = |M| + H, eps = |M g − g⁺ + c| + H|g| + r + |V'|d. *)
Theorem entry_pair (n m m' : nat) (l v v' z : matrix) (js : matrix -> Prop) (mid h : matrix) (c r d g g' : vector)
  (f : vector -> vector) (x before after after' : vector) :
  entries n m m' l v v' z js mid h -> jacobians n f js x before ->
  (forall a, (a < m')%nat -> Rabs (times n v' (subtract (f before) after) a - c a) <= r a) ->
  (forall s, (s < n)%nat -> Rabs (after s - after' s) <= d s) ->
  forall a, (a < m')%nat -> Rabs (times n v' (subtract (f x) after') a - g' a) <=
    times m (fun a b => Rabs (mid a b) + h a b) (fun b => Rabs (times n v (subtract x before) b - g b)) a
    + (Rabs (times m mid g a - g' a + c a) + times m h (fun b => Rabs (g b)) a + r a + times n (fun a s => Rabs (v' a s)) d a).
Proof.
  intros [E [Z B]] J M D a Ha. set (y := times n v (subtract x before)).
  set (big := times m (fun a b => Rabs (mid a b) + h a b) (fun b => Rabs (y b - g b)) a).
  set (side := times m h (fun b => Rabs (g b)) a).
  (* row a of V' times F(x) less F of the target *)
  assert (A : forall j, js j -> times m mid g a - (big + side) <= dot n (v' a) (times n j (subtract x before)) <= times m mid g a + (big + side)).
  { intros j Hj. change (dot n (v' a) (times n j (subtract x before))) with (times n v' (times n j (subtract x before)) a).
    rewrite <- (seen_times n m l v v' j z) by trivial. fold y. specialize (B j Hj a).
    assert (Q : Rabs (times m (seen n m v' j l z) y a - times m mid g a) <= big + side); [|apply Rabs_ends in Q; lra].
    unfold big, side, times. rewrite <- sum_minus, <- sum_plus. eapply Rle_trans; [apply sum_abs|].
    apply sum_le. intros b Hb. specialize (B b Ha Hb).
    replace (seen n m v' j l z a b * y b - mid a b * g b) with
      ((mid a b + (seen n m v' j l z a b - mid a b)) * (y b - g b) + (seen n m v' j l z a b - mid a b) * g b) by ring.
    eapply Rle_trans; [apply Rabs_triang|]. rewrite !Rabs_mult. apply Rplus_le_compat.
    - apply Rmult_le_compat_r; [apply Rabs_pos|]. eapply Rle_trans; [apply Rabs_triang|]. lra.
    - apply Rmult_le_compat_r; [apply Rabs_pos|exact B]. }
  assert (G := along n f js x before (v' a) _ _ J A).
  change (dot n (v' a) (subtract (f x) (f before))) with (times n v' (subtract (f x) (f before)) a) in G.
  specialize (M a Ha).
  assert (Mv : Rabs (times n v' (subtract after after') a) <= times n (fun a s => Rabs (v' a s)) d a).
  { apply times_near; [intros; apply Rle_refl|]. intros s Hs. unfold subtract. now apply D. }
  assert (Sp : times n v' (subtract (f x) after') a = times n v' (subtract (f x) (f before)) a
    + times n v' (subtract (f before) after) a + times n v' (subtract after after') a).
  { rewrite !times_minus. ring. }
  rewrite Sp. apply Rabs_ends in M. apply Rabs_ends in Mv.
  assert (G1 := Rle_abs (times m mid g a - g' a + c a)). assert (G2 := Rle_abs (- (times m mid g a - g' a + c a))).
  rewrite Rabs_Ropp in G2. apply Rabs_le_between. lra.
Qed.

(** Sets in which every trajectory from another is from some step on. *)
Definition ends_in (m : model) (s c : set m) : Prop := exists N, forall x h, trajectory m x h -> s (x O) (h O) ->
  forall n, (N <= n)%nat -> c (x n) (h n).

Lemma kept_ends_in m s : kept m s -> ends_in m s s.
Proof. intro K. exists O. intros x h T S0 n _. now apply stays. Qed.

(** Bounds of the entries of |V e − g|, wherever a step starts in the set c. *)
Definition entrywise {W H : Type} (n m : nat) (v : matrix) (g : vector) (F : vector -> W -> H -> vector) (inW : W -> Prop)
  (moves : H -> H -> Prop) (target : H -> vector) (c : vector -> H -> Prop) (K : matrix) (eps : vector) : Prop :=
  forall x h h' w, c x h -> inW w -> moves h h' -> forall a, (a < m)%nat ->
    Rabs (times n v (subtract (F x w h) (target h')) a - g a) <= times m K (fun b => Rabs (times n v (subtract x (target h)) b - g b)) a + eps a.

Definition state_error {W H : Type} (F : vector -> W -> H -> vector) inW moves (target : H -> vector) (i : nat) :=
  Model vector W H F inW moves (fun x h => Rabs (x i - target h i)).

(* (3a), (8): if in the end a trajectory from S is in c, K p < p and K b + eps <= b, then |e_s| falls below any number above |(L g)_s| + Σ |L_si| b_i. *)
Theorem componentwise {W H : Type} (n m : nat) (l v : matrix) (g : vector) (F : vector -> W -> H -> vector) inW moves target
  (s c : set (state_error F inW moves target O)) (K : matrix) (eps p b : vector) (D : R) (i : nat) :
  left_inverse n m l v -> (i < n)%nat -> ends_in _ s c -> entrywise n m v g F inW moves target c K eps ->
  (forall x h, c x h -> forall a, (a < m)%nat -> Rabs (times n v (subtract x (target h)) a - g a) <= D) ->
  (forall a d, 0 <= K a d) -> (forall a, (a < m)%nat -> 0 < p a) ->
  (forall a, (a < m)%nat -> times m K b a + eps a <= b a /\ times m K p a < p a) ->
  ultimate (state_error F inW moves target i) s (Rabs (times m l g i) + sum m (fun a => Rabs (l i a) * b a)).
Proof.
  intros E Hi [N0 En] St Bd HK Hp Cp b' Hb.
  set (top := Rabs (times m l g i) + sum m (fun a => Rabs (l i a) * b a)) in Hb.
  set (q := sum m (fun a => Rabs (l i a))).
  assert (Hq : 0 <= q) by (apply sum_nonneg; intros; apply Rabs_pos).
  set (u := (b' - top) / (q + 1)). assert (Hu : 0 < u) by (apply Rdiv_lt_0_compat; lra).
  destruct (comparison 1 (fun _ _ => true) (fun _ => m) (fun _ _ => K) (fun _ _ => eps) (fun _ => b) (fun _ => p) D
    ltac:(intros; apply HK) ltac:(intros; now apply Hp) ltac:(intros; now apply Cp) (fun _ a => b a + u) ltac:(intros; lra)) as [N1 C].
  exists (N0 + N1)%nat. intros x h T S0 t Ht. cbn.
  set (y := fun k a => times n v (subtract (x (N0 + k)%nat) (target (h (N0 + k)%nat))) a - g a).
  assert (In : forall k, c (x (N0 + k)%nat) (h (N0 + k)%nat)) by (intro k; apply En; trivial; lia).
  assert (Y : forall a, (a < m)%nat -> Rabs (y (t - N0)%nat a) < b a + u).
  { intros a Ha. apply (C (fun _ => O) y); try lia; trivial.
    - intro k. split; [lia|reflexivity].
    - intros k d Hd. unfold y. replace (N0 + S k)%nat with (S (N0 + k)) by lia.
      destruct (T (N0 + k)%nat) as [Mv [w [Iw Ex]]]. cbn in Ex. rewrite Ex. apply St; [apply In|exact Iw|exact Mv|exact Hd].
    - intros d Hd. unfold y. apply Bd; trivial. }
  unfold y in Y. replace (N0 + (t - N0))%nat with t in Y by lia.
  assert (Ei := recovered n m l v (subtract (x t) (target (h t))) i E Hi). unfold subtract at 2 in Ei. rewrite <- Ei.
  set (z := times n v (subtract (x t) (target (h t)))) in *.
  replace (times m l z i) with (times m l g i + times m l (subtract z g) i) by (rewrite times_minus; ring).
  eapply Rle_lt_trans; [apply Rabs_triang|].
  assert (Q : Rabs (times m l (subtract z g) i) <= sum m (fun a => Rabs (l i a) * b a) + q * u).
  { unfold q. rewrite <- sum_scale_r, <- sum_plus. eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros a Ha.
    rewrite Rabs_mult, <- Rmult_plus_distr_l. apply Rmult_le_compat_l; [apply Rabs_pos|]. left. apply (Y a Ha). }
  assert (q * u < b' - top); [|unfold top in *; lra].
  replace (b' - top) with ((q + 1) * u) by (unfold u; field; lra). lra.
Qed.

(* (3b) In the ball's own basis, g = 0: if Σ_j K_ij R + eps_i <= R in every row, the ball is mapped into itself. *)
Theorem invariant_rows {W H : Type} (n m : nat) (v : matrix) (F : vector -> W -> H -> vector) inW moves target (K : matrix) (eps : vector) (r : R) :
  let ball x h := norm n (largest m) v (subtract x (target h)) <= r in
  0 <= r -> (forall a d, 0 <= K a d) -> entrywise n m v (fun _ => 0) F inW moves target ball K eps ->
  (forall a, (a < m)%nat -> sum m (fun j => K a j) * r + eps a <= r) ->
  kept (several n (largest m) v F inW moves target) ball.
Proof.
  intros ball Hr HK St Row x h h' w Hx Hw Hm. unfold ball, norm. apply largest_le; trivial. intros a Ha.
  specialize (St x h h' w Hx Hw Hm a Ha). rewrite Rminus_0_r in St. eapply Rle_trans; [exact St|].
  eapply Rle_trans; [|apply (Row a Ha)]. apply Rplus_le_compat_r. unfold times at 1. rewrite <- sum_scale_r.
  apply sum_le. intros j Hj. apply Rmult_le_compat_l; trivial. rewrite Rminus_0_r.
  unfold ball, norm in Hx. eapply Rle_trans; [apply (largest_ge m (times n v (subtract x (target h))) j Hj)|exact Hx].
Qed.

(** Stances: the map, the size of the error and the set of each; a trajectory takes any steps that follow, in any order. *)
Section Stances.
Variables (X W H : Type) (stances : nat) (follows : nat -> nat -> bool).
Variables (F : nat -> X -> W -> H -> X) (inW : W -> Prop) (moves : H -> H -> Prop) (size : nat -> X -> H -> R) (s : nat -> X -> H -> Prop).

Definition travels (st : nat -> nat) (x : nat -> X) (h : nat -> H) : Prop := forall n,
  (st n < stances)%nat /\ follows (st n) (st (S n)) = true /\ moves (h n) (h (S n)) /\
  exists w, inW w /\ x (S n) = F (st n) (x n) w (h n).

Definition kept_on_steps (set : nat -> X -> H -> Prop) : Prop := forall a b x h h' w, (a < stances)%nat -> (b < stances)%nat ->
  follows a b = true -> set a x h -> inW w -> moves h h' -> set b (F a x w h) h'.

Definition step_pairs (set : nat -> X -> H -> Prop) (k eps : nat -> nat -> R) : Prop := forall a b x h h' w,
  (a < stances)%nat -> (b < stances)%nat -> follows a b = true -> set a x h -> inW w -> moves h h' ->
  size b (F a x w h) h' <= k a b * size a x h + eps a b.

(* Stances (3a): regions, each mapped into that of every stance that may follow, are kept. *)
Theorem regions_kept (region : nat -> X -> Prop) :
  (forall a b x w h, (a < stances)%nat -> (b < stances)%nat -> follows a b = true -> region a x -> inW w -> region b (F a x w h)) ->
  kept_on_steps (fun a x _ => region a x).
Proof. intros I a b x h h' w A B E S Iw _. now apply (I a b). Qed.

(* Stances (3b): with k_st R_s⁺ + eps_st <= R_t on every step, balls of any radii R_s <= R*_s <= R_s⁺ are kept. *)
Theorem balls_kept (region : nat -> X -> Prop) (k eps : nat -> nat -> R) (r radius outer : nat -> R) : (forall a b, 0 <= k a b) ->
  step_pairs (fun a x h => size a x h <= outer a /\ region a x) k eps ->
  (forall a b, (a < stances)%nat -> (b < stances)%nat -> follows a b = true -> k a b * outer a + eps a b <= r b) ->
  (forall a, r a <= radius a <= outer a) -> (forall a x h, size a x h <= radius a -> region a x) ->
  kept_on_steps (fun a x h => size a x h <= radius a).
Proof.
  intros Hk P L R0 I a b x h h' w A B E S Iw Mv.
  assert (Q := P a b x h h' w A B E (conj (Rle_trans _ _ _ S (proj2 (R0 a))) (I a x h S)) Iw Mv).
  specialize (L a b A B E). assert (G : k a b * size a x h <= k a b * outer a).
  { apply Rmult_le_compat_l; trivial. eapply Rle_trans; [exact S|apply R0]. }
  specialize (R0 b). lra.
Qed.

(* Stances (4): with k_st b_s + eps_st <= b_t and k_st p_s < p_t on every step, in the end the error is below b'_s > b_s in every stance s. *)
Theorem stance_bounds (k eps : nat -> nat -> R) (b p : nat -> R) (D : R) :
  kept_on_steps s -> step_pairs s k eps -> (forall a x h, s a x h -> 0 <= size a x h <= D) ->
  (forall a c, 0 <= k a c) -> (forall a, 0 < p a) ->
  (forall a c, (a < stances)%nat -> (c < stances)%nat -> follows a c = true -> k a c * b a + eps a c <= b c /\ k a c * p a < p c) ->
  forall b' : nat -> R, (forall a, b a < b' a) ->
  exists N, forall st x h, travels st x h -> s (st O) (x O) (h O) -> forall n, (N <= n)%nat -> size (st n) (x n) (h n) < b' (st n).
Proof.
  intros Kp P Bd Hk Hp Cp b' Hb.
  destruct (comparison stances follows (fun _ => 1%nat) (fun a c _ _ => k a c) (fun a c _ => eps a c) (fun a _ => b a) (fun a _ => p a) D
    ltac:(intros; apply Hk) ltac:(intros; apply Hp)
    ltac:(intros a c i Ha Hc E _; unfold times; cbn; specialize (Cp a c Ha Hc E); lra) (fun a _ => b' a) ltac:(intros; apply Hb)) as [N C].
  exists N. intros st x h T S0 n Hn.
  assert (In : forall n, s (st n) (x n) (h n)).
  { clear n Hn. induction n as [|q IH]; [exact S0|]. destruct (T q) as [A [E [Mv [w [Iw Ex]]]]]. rewrite Ex.
    apply (Kp (st q)); trivial. apply (T (S q)). }
  assert (Z := C st (fun n _ => size (st n) (x n) (h n))). cbv beta in Z.
  assert (Pos : forall n, Rabs (size (st n) (x n) (h n)) = size (st n) (x n) (h n)) by (intro q; apply Rabs_pos_eq, (Bd _ _ _ (In q))).
  rewrite <- Pos. refine (Z _ _ _ n Hn O Nat.lt_0_1).
  - intro q. destruct (T q) as [A [E _]]. now split.
  - intros q i _. unfold times; cbn. rewrite !Pos, Rplus_0_l. destruct (T q) as [A [E [Mv [w [Iw Ex]]]]]. rewrite Ex.
    apply P; trivial. apply (T (S q)).
  - intros i _. rewrite Pos. apply (Bd _ _ _ S0).
Qed.

(* Stances (6): levels a⁺_t at least every k_st a_s + eps_st, down to d with k_st d_s + eps_st <= d_t: from step n on at most d_s. *)
Theorem settled_in_stances (k eps : nat -> nat -> R) (level : nat -> nat -> R) (n : nat) (d : nat -> R) :
  kept_on_steps s -> step_pairs s k eps -> (forall a c, 0 <= k a c) ->
  (forall i a c, (a < stances)%nat -> (c < stances)%nat -> follows a c = true -> k a c * level i a + eps a c <= level (S i) c) ->
  (forall a, (a < stances)%nat -> level n a <= d a) ->
  (forall a c, (a < stances)%nat -> (c < stances)%nat -> follows a c = true -> k a c * d a + eps a c <= d c) ->
  forall st x h, travels st x h -> s (st O) (x O) (h O) -> size (st O) (x O) (h O) <= level O (st O) ->
  forall t, (n <= t)%nat -> size (st t) (x t) (h t) <= d (st t).
Proof.
  intros Kp P Hk Lv Ld Dd st x h T S0 E0 t Ht.
  assert (In : forall q, s (st q) (x q) (h q)).
  { clear t Ht. induction q as [|q IH]; [exact S0|]. destruct (T q) as [A [E [Mv [w [Iw Ex]]]]]. rewrite Ex.
    apply (Kp (st q)); trivial. apply (T (S q)). }
  assert (Step : forall q c, size (st q) (x q) (h q) <= c ->
    size (st (S q)) (x (S q)) (h (S q)) <= k (st q) (st (S q)) * c + eps (st q) (st (S q))).
  { intros q c E. destruct (T q) as [A [Fo [Mv [w [Iw Ex]]]]]. destruct (T (S q)) as [A' _].
    assert (G := P _ _ _ _ _ w A A' Fo (In q) Iw Mv). rewrite <- Ex in G.
    assert (k (st q) (st (S q)) * size (st q) (x q) (h q) <= k (st q) (st (S q)) * c) by now apply Rmult_le_compat_l. lra. }
  assert (Down : forall i, size (st i) (x i) (h i) <= level i (st i)).
  { induction i as [|i IH]; [exact E0|]. destruct (T i) as [A [Fo _]]. destruct (T (S i)) as [A' _].
    eapply Rle_trans; [apply (Step _ _ IH)|now apply Lv]. }
  induction Ht as [|t Ht IH]; [eapply Rle_trans; [apply Down|apply Ld, (T n)]|].
  destruct (T t) as [A [Fo _]]. destruct (T (S t)) as [A' _]. eapply Rle_trans; [apply (Step _ _ IH)|now apply Dd].
Qed.
(** The first n steps of a trajectory, as far as they start in the regions. *)
Definition steps_within (region : nat -> X -> Prop) (n : nat) (st : nat -> nat) (x : nat -> X) (h : nat -> H) : Prop :=
  forall j, (j < n)%nat -> (forall i, (i <= j)%nat -> region (st i) (x i)) ->
  (st j < stances)%nat /\ (st (S j) < stances)%nat /\ follows (st j) (st (S j)) = true /\ moves (h j) (h (S j)) /\
  exists w, inW w /\ x (S j) = F (st j) (x j) w (h j).

(* Runs (3): a run of n steps in the regions from one of the starts, its error at the end above c, refutes that in all such runs the error stays within c from n steps on. *)
Theorem run_still_out (region : nat -> X -> Prop) (start : nat -> X -> H -> Prop) (c : R) (n : nat) st x h :
  steps_within region n st x h -> (forall i, (i <= n)%nat -> region (st i) (x i)) -> start (st O) (x O) (h O) ->
  c < size (st n) (x n) (h n) ->
  ~ (forall t st x h, (n <= t)%nat -> steps_within region t st x h -> (forall i, (i <= t)%nat -> region (st i) (x i)) ->
     start (st O) (x O) (h O) -> size (st t) (x t) (h t) <= c).
Proof. intros T I S0 L A. specialize (A n st x h (le_n n) T I S0). lra. Qed.

(* Runs (4): a run that ends outside of the region starts in no set that lies in the regions and is kept. *)
Theorem run_leaves (region : nat -> X -> Prop) (set : nat -> X -> H -> Prop) (n : nat) st x h :
  kept_on_steps set -> (forall a x h, set a x h -> region a x) -> steps_within region n st x h -> ~ region (st n) (x n) ->
  ~ set (st O) (x O) (h O).
Proof.
  intros Kp I T Out S0. apply Out. apply (I _ _ (h n)).
  assert (In : forall j, (j <= n)%nat -> forall i, (i <= j)%nat -> set (st i) (x i) (h i)).
  { induction j as [|j IH]; intros Hj i Hi.
    - replace i with O by lia. exact S0.
    - destruct (Nat.eq_dec i (S j)) as [->|N]; [|apply IH; lia].
      destruct (T j ltac:(lia)) as [A [B [E [Mv [w [Iw Ex]]]]]].
      + intros q Hq. apply (I _ _ (h q)), IH; lia.
      + rewrite Ex. apply (Kp (st j)); trivial. apply IH; lia. }
  apply (In n); lia.
Qed.
End Stances.

(* A product of gains around a cycle that is 1, not below: doubled in one stance, halved in the other, an error never falls below 1. *)
Example cycle_of_product_one :
  let follows a b := negb (Nat.eqb a b) in let F (a : nat) (x : R) (_ _ : unit) := match a with O => 2 * x | _ => x / 2 end in
  let k (a b : nat) := match a with O => 2 | _ => 1 / 2 end in let size (_ : nat) (x : R) (_ : unit) := Rabs x in
  step_pairs R unit unit 2 follows F (fun _ => True) (fun _ _ => True) size (fun _ _ _ => True) k (fun _ _ => 0) /\
  exists st x h, travels R unit unit 2 follows F (fun _ => True) (fun _ _ => True) st x h /\ forall n, 1 <= size (st n) (x n) (h n).
Proof.
  intros follows F k size. split.
  - intros a b x h h' w _ _ _ _ _ _. unfold size, F, k. destruct a; unfold Rdiv.
    + rewrite Rabs_mult, (Rabs_pos_eq 2); lra.
    + rewrite Rabs_mult, (Rabs_pos_eq (/ 2)); lra.
  - exists (fun n => if Nat.even n then O else 1%nat), (fun n => if Nat.even n then 1 else 2), (fun _ => tt). split.
    + intro n. rewrite Nat.even_succ, <- Nat.negb_even. unfold follows, F.
      destruct (Nat.even n); cbn; (split; [lia|split; [reflexivity|split; [exact I|exists tt; split; [exact I|lra]]]]).
    + intro n. unfold size. destruct (Nat.even n); rewrite Rabs_pos_eq; lra.
Qed.
