(** Sets that are mapped into themselves, error curves, settling: proofs/invariant-set.md, proofs/curve.md, proofs/settling.md. *)
Require Import Reals Lra Lia.
From Ultibound Require Import Bound.
Open Scope R_scope.

Definition ball (m : model) (r : R) : set m := fun x h => error m x h <= r.

(* Invariant sets (1): a region whose image lies in it is mapped into itself. *)
Theorem invariant_region (m : model) (region : state m -> Prop) :
  (forall x w h, region x -> admissible m w -> region (map m x w h)) -> kept m (fun x _ => region x).
Proof. intros I x h h' w Hx Hw _. now apply I. Qed.

(* (2) If x*(h) lies in [p, q] and R <= min(p − a, b − q), every state within R of x*(h) lies in [a, b]. *)
Theorem ball_in_region (a b p q r t x : R) :
  p <= t <= q -> r <= Rmin (p - a) (b - q) -> Rabs (x - t) <= r -> a <= x <= b.
Proof.
  intros T L E. assert (A := Rmin_l (p - a) (b - q)). assert (B := Rmin_r (p - a) (b - q)).
  apply Rabs_ends in E. lra.
Qed.

(* (2) If a target lies in [p, q], a ball about it that lies in [a, b] has a radius of at most min(b − p, q − a). *)
Theorem largest_ball (a b p q r t : R) :
  p <= t <= q -> 0 <= r -> (forall x, Rabs (x - t) <= r -> a <= x <= b) -> r <= Rmin (b - p) (q - a).
Proof.
  intros T P I. assert (A := I (t + r)). assert (B := I (t - r)).
  replace (t + r - t) with r in A by ring. replace (t - r - t) with (- r) in B by ring.
  rewrite Rabs_Ropp in B. rewrite Rabs_pos_eq in A, B by trivial.
  apply Rmin_glb; [specialize (A (Rle_refl r))|specialize (B (Rle_refl r))]; lra.
Qed.

(* (3) With gain k and residual eps over the ball of radius R and kR + eps <= R, the ball is mapped into itself. *)
Theorem invariant_ball (m : model) (k eps r : R) :
  0 <= k -> pair m (ball m r) k eps -> k * r + eps <= r -> kept m (ball m r).
Proof.
  intros Hk P L x h h' w Hx Hw Hm. unfold ball in *. specialize (P x h h' w Hx Hw Hm).
  apply (Rmult_le_compat_l k) in Hx; trivial. lra.
Qed.

(* (3) With k, eps over the errors up to R⁺ within X and R > 0, any ball in X of radius R* from R to R⁺ is mapped into itself. *)
Theorem largest_ball_kept (m : model) (region : state m -> Prop) (k eps r radius outer : R) :
  0 <= k -> 0 <= eps -> 0 < r -> pair m (fun x h => error m x h <= outer /\ region x) k eps -> k * r + eps <= r ->
  r <= radius <= outer -> (forall x h, ball m radius x h -> region x) -> kept m (ball m radius).
Proof.
  intros Hk He Hr P L B I. apply (invariant_ball m k eps); trivial.
  - intros x h h' w Hx. apply P; split; [unfold ball in Hx; lra|now apply (I x h)].
  - assert (k <= 1).
    { apply Rnot_lt_le. intro N. apply (Rmult_lt_compat_r r) in N; lra. }
    assert (k * (radius - r) <= 1 * (radius - r)) by (apply Rmult_le_compat_r; lra). lra.
Qed.

(* R = 0 shows nothing of a larger ball: x⁺ = 2x keeps the ball of radius 0 alone. *)
Example radius_zero_keeps_no_more :
  let m := plain (fun x => 2 * x) in
  pair m (ball m 1) 2 0 /\ 2 * 0 + 0 <= 0 /\ kept m (ball m 0) /\ ~ kept m (ball m 1).
Proof.
  repeat split; try lra.
  - intros x h h' w _ _ _. cbn. rewrite !Rminus_0_r, Rabs_mult, (Rabs_pos_eq 2); lra.
  - intros x h h' w Hx _ _. cbn in *. unfold ball in *; cbn in *. rewrite Rminus_0_r in *.
    rewrite Rabs_mult, (Rabs_pos_eq 2); lra.
  - intro K. assert (B := K 1 tt tt tt). unfold ball in B; cbn in B. rewrite !Rminus_0_r, Rmult_1_r in B.
    rewrite Rabs_R1, Rabs_pos_eq in B by lra. specialize (B (Rle_refl 1) I I). lra.
Qed.

(** Error curves of one state. *)
Section Curve.
Variables W H : Type.
Variables (F : R -> W -> H -> R) (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R).
Let m := one_state F inW moves target.
Variable s : set m.

Fixpoint highest (a : nat -> R) (j : nat) : R := match j with O => 0 | S i => Rmax (highest a i) (a (S i)) end.

(** L_j = max(a_1, …, a_j) + d *)
Definition level (a : nat -> R) (d : R) (j : nat) : R := highest a j + d.

(** 0 = ρ_0 < ρ_1 < … < ρ_n reach over the set; a_j bounds |F(x, w) − x*(h)| in shell j; the target moves by at most d. *)
Definition shells (n : nat) (rho a : nat -> R) (d : R) : Prop :=
  rho O = 0 /\ (forall j, (j < n)%nat -> rho j < rho (S j)) /\
  (forall x h, s x h -> Rabs (x - target h) <= rho n) /\
  (forall j x h w, (j < n)%nat -> s x h -> inW w -> rho j <= Rabs (x - target h) <= rho (S j) ->
    Rabs (F x w h - target h) <= a (S j)) /\
  (forall h h', moves h h' -> Rabs (target h' - target h) <= d).

Lemma highest_grows a i j : (i <= j)%nat -> highest a i <= highest a j.
Proof. induction 1 as [|j _ IH]; [lra|]. cbn. eapply Rle_trans; [exact IH|apply Rmax_l]. Qed.

Lemma in_a_shell (rho : nat -> R) e j : rho O = 0 -> 0 <= e <= rho (S j) ->
  exists i, (i <= j)%nat /\ rho i <= e <= rho (S i).
Proof.
  intros Z; induction j as [|j IH]; intros E; [exists O; rewrite Z; auto|].
  destruct (Rle_dec e (rho (S j))) as [A|A].
  - destruct (IH (conj (proj1 E) A)) as [i [L B]]. exists i; split; [lia|exact B].
  - exists (S j); split; [lia|lra].
Qed.

(* Curve (1): from an error of at most ρ_j a step leads to one of at most L_j. *)
Theorem shell_levels (n : nat) (rho a : nat -> R) (d : R) : shells n rho a d ->
  forall j x h h' w, (0 < j <= n)%nat -> s x h -> inW w -> moves h h' -> Rabs (x - target h) <= rho j ->
  Rabs (F x w h - target h') <= level a d j.
Proof.
  intros [Z [_ [_ [A M]]]] [|j] x h h' w Hj Sx Iw Mv E; [lia|].
  destruct (in_a_shell rho _ j Z (conj (Rabs_pos (x - target h)) E)) as [i [L B]].
  specialize (A i x h w ltac:(lia) Sx Iw B). specialize (M h h' Mv).
  assert (G := highest_grows a (S i) (S j) ltac:(lia)). cbn in G.
  assert (G' := Rmax_r (highest a i) (a (S i))). unfold level.
  replace (F x w h - target h') with ((F x w h - target h) + - (target h' - target h)) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. rewrite Rabs_Ropp. cbn in *. lra.
Qed.

(* Curve (2): if |F(x, w) − x*(h)| − κ|e| <= v on the set, then k, eps are gain and residual for k >= κ, eps >= max(v, 0) + d. *)
Theorem line_pair (slope v d k eps : R) :
  (forall x h w, s x h -> inW w -> Rabs (F x w h - target h) - slope * Rabs (x - target h) <= v) ->
  (forall h h', moves h h' -> Rabs (target h' - target h) <= d) ->
  slope <= k -> Rmax v 0 + d <= eps -> pair m s k eps.
Proof.
  intros A M K E x h h' w Sx Iw Mv. cbn. specialize (A x h w Sx Iw). specialize (M h h' Mv).
  assert (G := Rmax_l v 0).
  assert (slope * Rabs (x - target h) <= k * Rabs (x - target h)) by (apply Rmult_le_compat_r; trivial; apply Rabs_pos).
  replace (F x w h - target h') with ((F x w h - target h) + - (target h' - target h)) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. rewrite Rabs_Ropp. lra.
Qed.

(* Curve (3): with shells n, …, j + 1 cleared, L_i <= ρ_{i−1}, after n − j + 1 steps the error stays within min(ρ_j, L_j). *)
Theorem sharp_bound (n : nat) (rho a : nat -> R) (d : R) (j : nat) : shells n rho a d -> kept m s -> (j <= n)%nat ->
  (forall i, (j < i <= n)%nat -> level a d i <= rho (i - 1)%nat) ->
  forall x h, trajectory m x h -> s (x O) (h O) -> forall t, (n - j + 1 <= t)%nat ->
  Rabs (x t - target (h t)) <= rho j /\ ((0 < j)%nat -> Rabs (x t - target (h t)) <= level a d j).
Proof.
  intros Sh K Hj Cl x h T S0. assert (Z := Sh). destruct Z as [Z [Inc [Cov _]]].
  assert (In := stays m s K x h T S0). cbn in In.
  assert (Step : forall i t, (0 < i <= n)%nat -> Rabs (x t - target (h t)) <= rho i ->
    Rabs (x (S t) - target (h (S t))) <= level a d i).
  { intros i t Hi E. destruct (T t) as [Mv [w [Iw Ex]]]. cbn in Ex. rewrite Ex.
    apply (shell_levels n rho a d Sh i); trivial. }
  (* after n − i steps within ρ_i, for i from n down to j *)
  assert (Down : forall c, (c <= n - j)%nat -> Rabs (x c - target (h c)) <= rho (n - c)%nat).
  { induction c as [|c IH]; intro Hc; [rewrite Nat.sub_0_r; apply Cov, In|].
    specialize (IH ltac:(lia)). apply (Step (n - c)%nat c) in IH; [|lia].
    specialize (Cl (n - c)%nat ltac:(lia)). replace (n - c - 1)%nat with (n - S c)%nat in Cl by lia. lra. }
  assert (Stay : forall t, (n - j <= t)%nat -> Rabs (x t - target (h t)) <= rho j).
  { intros t Ht. induction Ht as [|t Ht IH].
    - specialize (Down (n - j)%nat (le_n _)). now replace (n - (n - j))%nat with j in Down by lia.
    - destruct (Nat.eq_dec j n) as [->|N]; [apply Cov, In|].
      assert (E := Cl (S j) ltac:(lia)). replace (S j - 1)%nat with j in E by lia.
      assert (IH' : Rabs (x t - target (h t)) <= rho (S j)) by (specialize (Inc j ltac:(lia)); lra).
      apply (Step (S j)) in IH'; [lra|lia]. }
  intros t Ht. split; [apply Stay; lia|]. intro P. destruct t as [|t]; [lia|].
  apply (Step j); [lia|]. apply Stay; lia.
Qed.
End Curve.

(* A shell cleared at its outer end, L_2 < ρ_2, shows nothing: x⁺ = min(x, 3/2) has ρ = 0, 1, 2 and stays at 3/2 for ever. *)
Example cleared_at_the_outer_end :
  let F (x : R) (_ _ : unit) := Rmin x (3 / 2) in let rho j := INR j in
  let a j := match j with S (S _) => 3 / 2 | _ => 1 end in
  let m := one_state F (fun _ => True) (fun _ _ => True) (fun _ => 0) in let s : set m := fun x _ => 0 <= x <= 2 in
  shells unit unit F (fun _ => True) (fun _ _ => True) (fun _ => 0) s 2 rho a 0 /\ kept m s /\
  level a 0 2 < rho 2%nat /\ exists x h, trajectory m x h /\ s (x O) (h O) /\ forall t, ~ Rabs (x t - 0) <= rho 1%nat.
Proof.
  intros F rho a m s. split; [|split; [|split]].
  - repeat split; intros.
    + unfold rho. rewrite S_INR. lra.
    + unfold rho; cbn in *. destruct H. rewrite Rminus_0_r, Rabs_pos_eq; lra.
    + unfold rho, F in *; cbn in H0. rewrite Rminus_0_r in *. destruct H0. rewrite (Rabs_pos_eq x) in * by trivial.
      destruct j as [|[|j]]; [| |lia]; cbn in *; unfold Rmin; destruct (Rle_dec x (3 / 2)); rewrite Rabs_pos_eq; lra.
    + rewrite Rminus_0_r, Rabs_R0; lra.
  - intros x h h' w Hx _ _. cbn in *. unfold s, F, Rmin in *. destruct (Rle_dec x (3 / 2)); lra.
  - unfold level, rho; cbn. unfold Rmax. repeat destruct (Rle_dec _ _); lra.
  - exists (fun _ => 3 / 2), (fun _ => tt). repeat split; try lra.
    + exists tt. split; [exact I|]. cbn. unfold F, Rmin. destruct (Rle_dec (3 / 2) (3 / 2)); lra.
    + intro t. unfold rho; cbn. rewrite Rminus_0_r, Rabs_pos_eq; lra.
Qed.

(** Settling: |e| <= a leads to |e⁺| <= led a. *)
Definition leads (m : model) (s : set m) (led : R -> R) : Prop :=
  forall a x h h' w, s x h -> admissible m w -> may_become m h h' -> error m x h <= a -> error m (map m x w h) h' <= led a.

(* Settling (1): gain k >= 0 and residual eps lead from a to ka + eps. *)
Theorem pair_leads (m : model) (s : set m) (k eps : R) : 0 <= k -> pair m s k eps -> leads m s (fun a => k * a + eps).
Proof.
  intros Hk P a x h h' w Hx Hw Hm E. eapply Rle_trans; [now apply P|].
  apply Rplus_le_compat_r. now apply Rmult_le_compat_l.
Qed.

(* Settling (1): from a, levels a_{i+1} >= λ(a_i) down to a_n <= b with λ(b) <= b: the error is at most b from step n on. *)
Theorem settled_after (m : model) (s : set m) (led : R -> R) (a : nat -> R) (n : nat) (b : R) :
  kept m s -> leads m s led -> (forall i, led (a i) <= a (S i)) -> a n <= b -> led b <= b ->
  forall x h, trajectory m x h -> s (x O) (h O) -> error m (x O) (h O) <= a O ->
  forall t, (n <= t)%nat -> error m (x t) (h t) <= b.
Proof.
  intros K L A An B x h T S0 E0 t Ht. assert (In := stays m s K x h T S0).
  assert (Step : forall c t, error m (x t) (h t) <= c -> error m (x (S t)) (h (S t)) <= led c).
  { intros c u E. destruct (T u) as [Mv [w [Iw Ex]]]. rewrite Ex. apply (L c); trivial. }
  assert (Down : forall i, error m (x i) (h i) <= a i).
  { induction i as [|i IH]; [exact E0|]. eapply Rle_trans; [apply (Step _ _ IH)|apply A]. }
  induction Ht as [|t Ht IH]; [eapply Rle_trans; [apply Down|exact An]|].
  eapply Rle_trans; [apply (Step _ _ IH)|exact B].
Qed.

(* Settling (2): after settling, a change of the state by less than R − b keeps it in a set that holds the ball of radius R. *)
Theorem push_kept {W H : Type} (F : R -> W -> H -> R) inW moves target (s : set (one_state F inW moves target)) (b r push : R) :
  ultimate _ s b -> (forall x h, Rabs (x - target h) <= r -> s x h) -> Rabs push < r - b ->
  exists N, forall x h, trajectory (one_state F inW moves target) x h -> s (x O) (h O) ->
  forall n, (N <= n)%nat -> s (x n + push) (h n).
Proof.
  intros U B P. destruct (U (r - Rabs push) ltac:(lra)) as [N HN]. exists N. intros x h T S0 n Hn.
  apply B. specialize (HN x h T S0 n Hn). cbn in HN.
  replace (x n + push - target (h n)) with ((x n - target (h n)) + push) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. lra.
Qed.

(* λ(b) <= b is needed: λ(e) = e/2 + 1 leads from 0 to b = 0 in no step at all, and beyond it in the next. *)
Example settled_level_needed :
  let m := plain (fun x => x / 2 + 1) in let s : set m := fun _ _ => True in
  kept m s /\ pair m s (1 / 2) 1 /\ exists x h, trajectory m x h /\ error m (x O) (h O) <= 0 /\ ~ error m (x 1%nat) (h 1%nat) <= 0.
Proof.
  repeat split.
  - intros x h h' w _ _ _. cbn. rewrite !Rminus_0_r. eapply Rle_trans; [apply Rabs_triang|].
    rewrite Rabs_R1. unfold Rdiv at 1. rewrite Rabs_mult, (Rabs_pos_eq (/ 2)); lra.
  - exists (iterate (fun x => x / 2 + 1) 0), (fun _ => tt). split; [apply iterates|]. cbn.
    rewrite !Rminus_0_r. split; [rewrite Rabs_R0; lra|].
    rewrite Rabs_pos_eq; lra.
Qed.

(* Curve (4): of several bounds that hold in the end, the least does. *)
Theorem least_of_bounds (m : model) (s : set m) (b b' : R) : ultimate m s b -> ultimate m s b' -> ultimate m s (Rmin b b').
Proof. intros U U' c. unfold Rmin. destruct (Rle_dec b b'); [apply U|apply U']. Qed.
