(** Sector route of one state: proofs/sector.md. *)
Require Import Reals Lra Lia List.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Slope.
Open Scope R_scope.

(** Continuous on s, and smooth but for finitely many points of every segment in it, with slopes between lo and hi. *)
Definition slopes_between (s : R -> Prop) (f : R -> R) (lo hi : R) : Prop :=
  continuous_over s f /\ forall a b, s a -> s b -> a <= b -> exists cuts, smooth_on a b cuts f (fun d => lo <= d <= hi).

Lemma mean_slope (s : R -> Prop) (f : R -> R) (lo hi x y : R) : lo <= hi -> convex s -> slopes_between s f lo hi -> s x -> s y ->
  exists c, lo <= c <= hi /\ f x - f y = c * (x - y).
Proof.
  intros L V [C D] Hx Hy.
  assert (G : forall a b, a < b -> s a -> s b -> exists c, lo <= c <= hi /\ f b - f a = c * (b - a)).
  { intros a b Lt Sa Sb. destruct (D a b Sa Sb (Rlt_le _ _ Lt)) as [cuts Hc].
    assert (M := mean_value f a b cuts lo hi (Rlt_le _ _ Lt) ltac:(apply (continuous_sub s); trivial; intros z Hz; exact (V _ _ _ Sa Sb Hz)) Hc).
    exists ((f b - f a) / (b - a)). split; [|field; lra].
    split; apply (Rmult_le_reg_r (b - a)); try lra; unfold Rdiv; rewrite Rmult_assoc, Rinv_l by lra; lra. }
  destruct (Rtotal_order y x) as [Lt|[->|Lt]].
  - now apply G.
  - exists lo. split; [lra|ring].
  - destruct (G x y Lt Hx Hy) as [c [B E]]. exists c. split; [exact B|]. lra.
Qed.

Lemma bilinear_corner (c0 c1 m0 m1 k c m : R) : c0 <= c <= c1 -> m0 <= m <= m1 ->
  Rabs (1 + c0 * m0) <= k -> Rabs (1 + c0 * m1) <= k -> Rabs (1 + c1 * m0) <= k -> Rabs (1 + c1 * m1) <= k -> Rabs (1 + c * m) <= k.
Proof.
  intros C M A1 A2 A3 A4. apply Rabs_ends in A1. apply Rabs_ends in A2. apply Rabs_ends in A3. apply Rabs_ends in A4.
  (* along c at both ends of m, then along m *)
  assert (E0 : - k <= 1 + c * m0 <= k) by (destruct (Rle_dec 0 m0); nra).
  assert (E1 : - k <= 1 + c * m1 <= k) by (destruct (Rle_dec 0 m1); nra).
  apply Rabs_le_between. destruct (Rle_dec 0 c); nra.
Qed.

Section Route.
Variables W H : Type.
(** F_u(x, w): the map with u in place of the correction; the correction itself; the target; the set. *)
Variables (Fu : R -> R -> W -> H -> R) (correction : R -> W -> H -> R).
Variables (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R) (s : R -> H -> Prop).

(* Sector (1): with ∂F_u/∂u in [c_0, c_1] on the way from 0 to n(x, w), F(x, w) − N(x, w) = c n(x, w) for some c in [c_0, c_1]. *)
Theorem follows_correction (c0 c1 x : R) (w : W) (h : H) : c0 <= c1 ->
  slopes_between (between (Rmin 0 (correction x w h)) (Rmax 0 (correction x w h))) (fun u => Fu u x w h) c0 c1 ->
  exists c, c0 <= c <= c1 /\ Fu (correction x w h) x w h - Fu 0 x w h = c * correction x w h.
Proof.
  intros L B. set (n := correction x w h) in *.
  destruct (mean_slope (between (Rmin 0 n) (Rmax 0 n)) (fun u => Fu u x w h) c0 c1 n 0 L) as [c [C E]]; trivial.
  - intros a b z A Bz Z. unfold between in *. lra.
  - split; [apply Rmin_r|apply Rmax_r].
  - split; [apply Rmin_l|apply Rmax_l].
  - exists c. split; [exact C|]. cbv beta in E. rewrite E. ring.
Qed.

(* Sector (2): and with ∂n/∂x in [m_0, m_1], |n(x*, w)| <= a, |N − x| <= r: k the largest |1 + c_i m_j|, residual r + max(|c_0|, |c_1|) a + d. *)
Theorem sector_pair (c0 c1 m0 m1 a r d k : R) : c0 <= c1 -> m0 <= m1 -> about_target H target s ->
  (forall x w h, s x h -> inW w -> slopes_between (between (Rmin 0 (correction x w h)) (Rmax 0 (correction x w h))) (fun u => Fu u x w h) c0 c1) ->
  (forall w h, inW w -> slopes_between (fun x => s x h) (fun x => correction x w h) m0 m1) ->
  (forall w h, inW w -> Rabs (correction (target h) w h) <= a) -> (forall x w h, s x h -> inW w -> Rabs (Fu 0 x w h - x) <= r) ->
  (forall h h', moves h h' -> Rabs (target h' - target h) <= d) ->
  Rabs (1 + c0 * m0) <= k -> Rabs (1 + c0 * m1) <= k -> Rabs (1 + c1 * m0) <= k -> Rabs (1 + c1 * m1) <= k ->
  pair (one_state (fun x w h => Fu (correction x w h) x w h) inW moves target) s k (r + Rmax (Rabs c0) (Rabs c1) * a + d).
Proof.
  intros Lc Lm A HC HM Ha Hr Hd K1 K2 K3 K4 x h h' w Sx Iw Mv. cbn. destruct (A h) as [V T].
  destruct (follows_correction c0 c1 x w h Lc (HC x w h Sx Iw)) as [c [C E]].
  destruct (mean_slope (fun x => s x h) (fun x => correction x w h) m0 m1 x (target h) Lm V (HM w h Iw) Sx T) as [m [M E']]. cbv beta in E'.
  specialize (Ha w h Iw). specialize (Hr x w h Sx Iw). specialize (Hd h h' Mv).
  assert (K := bilinear_corner c0 c1 m0 m1 k c m C M K1 K2 K3 K4).
  assert (Bc : Rabs c <= Rmax (Rabs c0) (Rabs c1)).
  { assert (G1 := Rmax_l (Rabs c0) (Rabs c1)). assert (G2 := Rmax_r (Rabs c0) (Rabs c1)).
    apply Rabs_ends in G1. apply Rabs_ends in G2. apply Rabs_le_between. lra. }
  replace (Fu (correction x w h) x w h - target h') with
    ((1 + c * m) * (x - target h) + ((Fu 0 x w h - x) + (c * correction (target h) w h + - (target h' - target h)))).
  2:{ replace (Fu (correction x w h) x w h) with (Fu 0 x w h + c * correction x w h) by lra.
      replace (correction x w h) with (correction (target h) w h + m * (x - target h)) by lra. ring. }
  eapply Rle_trans; [apply Rabs_triang|]. rewrite Rabs_mult.
  assert (P1 : Rabs (1 + c * m) * Rabs (x - target h) <= k * Rabs (x - target h)) by (apply Rmult_le_compat_r; trivial; apply Rabs_pos).
  assert (P2 : Rabs (c * correction (target h) w h) <= Rmax (Rabs c0) (Rabs c1) * a) by (rewrite Rabs_mult; apply Rmult_le_compat; trivial; apply Rabs_pos).
  assert (P3 : Rabs ((Fu 0 x w h - x) + (c * correction (target h) w h + - (target h' - target h))) <= r + (Rmax (Rabs c0) (Rabs c1) * a + d)).
  { eapply Rle_trans; [apply Rabs_triang|]. apply Rplus_le_compat; trivial. eapply Rle_trans; [apply Rabs_triang|]. rewrite Rabs_Ropp. lra. }
  lra.
Qed.
End Route.

(* Sector (4): no k of (2) is below |1 + y z| for y in [c_0, c_1] and z in [m_0, m_1]. *)
Theorem sector_not_below (c0 c1 m0 m1 k y z : R) : c0 <= y <= c1 -> m0 <= z <= m1 ->
  Rmax (Rmax (Rabs (1 + c0 * m0)) (Rabs (1 + c0 * m1))) (Rmax (Rabs (1 + c1 * m0)) (Rabs (1 + c1 * m1))) <= k -> Rabs (1 + y * z) <= k.
Proof.
  intros Y Z K.
  assert (A1 := Rmax_l (Rmax (Rabs (1 + c0 * m0)) (Rabs (1 + c0 * m1))) (Rmax (Rabs (1 + c1 * m0)) (Rabs (1 + c1 * m1)))).
  assert (A2 := Rmax_r (Rmax (Rabs (1 + c0 * m0)) (Rabs (1 + c0 * m1))) (Rmax (Rabs (1 + c1 * m0)) (Rabs (1 + c1 * m1)))).
  assert (B1 := Rmax_l (Rabs (1 + c0 * m0)) (Rabs (1 + c0 * m1))). assert (B2 := Rmax_r (Rabs (1 + c0 * m0)) (Rabs (1 + c0 * m1))).
  assert (B3 := Rmax_l (Rabs (1 + c1 * m0)) (Rabs (1 + c1 * m1))). assert (B4 := Rmax_r (Rabs (1 + c1 * m0)) (Rabs (1 + c1 * m1))).
  apply (bilinear_corner c0 c1 m0 m1 k y z Y Z); lra.
Qed.

(* Two corners are not enough: with c in [−1, 1] and m in [0, 1] the corners (−1, 1) and (1, 0) have 0 and 1, and (1, 1) has 2. *)
Example all_corners_count : Rabs (1 + -1 * 1) = 0 /\ Rabs (1 + 1 * 0) = 1 /\ Rabs (1 + 1 * 1) = 2.
Proof. repeat split; rewrite Rabs_pos_eq; lra. Qed.

(* The sector gain says nothing of two trajectories: x⁺ = x − c(x) x with c = x/2, kept within [1/2, 1], has k = 1/2, and brings 2 and 3/2 no nearer than 3/8. *)
Example no_statement_about_two_trajectories :
  let c x := Rmax (1 / 2) (Rmin 1 (x / 2)) in let f x := x - c x * x in
  (forall x, 0 <= x -> Rabs (f x) <= 1 / 2 * Rabs x) /\ ~ Rabs (f 2 - f (3 / 2)) <= 1 / 2 * Rabs (2 - 3 / 2).
Proof.
  intros c f. split.
  - intros x Hx. unfold f, c, Rmax, Rmin. repeat destruct (Rle_dec _ _); rewrite (Rabs_pos_eq x) by trivial; apply Rabs_le_between; nra.
  - unfold f, c, Rmax, Rmin. repeat destruct (Rle_dec _ _); try lra. intro A. apply Rabs_ends in A. rewrite Rabs_pos_eq in A; lra.
Qed.
