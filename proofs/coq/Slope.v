(** Slope and split routes of one state: proofs/slope.md, proofs/split.md. *)
Require Import Reals Lra Lia List.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors.
Open Scope R_scope.

Definition convex (s : R -> Prop) : Prop := forall x y z, s x -> s y -> x <= z <= y -> s z.

(** Continuous on s and, on every segment in s, smooth but for finitely many points, with slopes of magnitude k at most. *)
Definition slopes_at_most (s : R -> Prop) (f : R -> R) (k : R) : Prop :=
  continuous_over s f /\ forall a b, s a -> s b -> a <= b -> exists cuts, smooth_on a b cuts f (fun d => Rabs d <= k).

(* (1) If |∂F/∂x| <= k wherever it exists on the convex set, then |F(x, w) − F(y, w)| <= k|x − y| there. *)
Theorem slope_gain (s : R -> Prop) (f : R -> R) (k : R) : convex s -> slopes_at_most s f k ->
  forall x y, s x -> s y -> Rabs (f x - f y) <= k * Rabs (x - y).
Proof.
  intros V [C D] x y Hx Hy.
  assert (s (Rmin y x) /\ s (Rmax y x)) as [A B] by (unfold Rmin, Rmax; destruct (Rle_dec y x); auto).
  destruct (D _ _ A B (Rle_trans _ _ _ (Rmin_l y x) (Rmax_l y x))) as [cuts Hc].
  apply (mean_size f y x cuts k); trivial.
  apply (continuous_sub s); trivial. intros z Hz. exact (V _ _ _ A B Hz).
Qed.

Section Routes.
Variables W H : Type.
Variables (F : R -> W -> H -> R) (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R) (s : R -> H -> Prop).

(** At every h the set is convex and contains the target. *)
Definition about_target : Prop := forall h, convex (fun x => s x h) /\ s (target h) h.

(* (2) Slopes of at most k, a target that misses itself by at most m and moves by at most d: gain k, residual m + d. *)
Theorem slope_pair (k m d : R) : about_target ->
  (forall h w, inW w -> slopes_at_most (fun x => s x h) (fun x => F x w h) k) ->
  (forall h w, inW w -> Rabs (F (target h) w h - target h) <= m) ->
  (forall h h', moves h h' -> Rabs (target h' - target h) <= d) ->
  pair (one_state F inW moves target) s k (m + d).
Proof.
  intros A K M D x h h' w Sx Iw Mv. cbn. destruct (A h) as [V T].
  assert (G := slope_gain _ _ k V (K h w Iw) x (target h) Sx T). cbn in G.
  specialize (M h w Iw). specialize (D h h' Mv).
  replace (F x w h - target h')
    with ((F x w h - F (target h) w h) + ((F (target h) w h - target h) + - (target h' - target h))) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. apply Rle_trans with (1 := Rplus_le_compat_l _ _ _ (Rabs_triang _ _)).
  rewrite Rabs_Ropp. lra.
Qed.

(* Split: slopes of x + F − N of at most k, |N(x, w) − x + F(x*, w) − N(x*, w)| <= m, a target that moves by at most d. *)
Theorem split_pair (N : R -> W -> H -> R) (k m d : R) : about_target ->
  (forall h w, inW w -> slopes_at_most (fun x => s x h) (fun x => x + (F x w h - N x w h)) k) ->
  (forall x h w, s x h -> inW w -> Rabs (N x w h - x + (F (target h) w h - N (target h) w h)) <= m) ->
  (forall h h', moves h h' -> Rabs (target h' - target h) <= d) ->
  pair (one_state F inW moves target) s k (m + d).
Proof.
  intros A K M D x h h' w Sx Iw Mv. cbn. destruct (A h) as [V T].
  assert (G := slope_gain _ _ k V (K h w Iw) x (target h) Sx T). cbn in G.
  specialize (M x h w Sx Iw). specialize (D h h' Mv).
  replace (F x w h - target h') with
    ((x + (F x w h - N x w h) - (target h + (F (target h) w h - N (target h) w h)))
     + ((N x w h - x + (F (target h) w h - N (target h) w h)) + - (target h' - target h))) by ring.
  eapply Rle_trans; [apply Rabs_triang|]. apply Rle_trans with (1 := Rplus_le_compat_l _ _ _ (Rabs_triang _ _)).
  rewrite Rabs_Ropp. lra.
Qed.
End Routes.

(* (3) If |∂x*/∂h_i| <= c_i along the segment and |h⁺_i − h_i| <= delta_i, the target moves by at most Σ c_i delta_i. *)
Theorem target_movement (n : nat) (target : vector -> R) (c delta h h' : vector) :
  let on t := target (fun i => h i + t * (h' i - h i)) in
  continuous_over (between 0 1) on ->
  (exists cuts, forall t, 0 < t < 1 -> ~ In t cuts -> exists g : vector,
     (forall i, (i < n)%nat -> Rabs (g i) <= c i) /\ is_derive on t (sum n (fun i => g i * (h' i - h i)))) ->
  (forall i, (i < n)%nat -> Rabs (h' i - h i) <= delta i) ->
  Rabs (on 1 - on 0) <= sum n (fun i => c i * delta i).
Proof.
  intros on C [cuts D] M. set (k := sum n (fun i => c i * delta i)).
  replace k with (k * Rabs (1 - 0)) by (rewrite Rminus_0_r, Rabs_R1; ring).
  apply (mean_size on 0 1 cuts k); rewrite ?Rmin_left, ?Rmax_right by lra; trivial.
  intros t Ht N. destruct (D t Ht N) as [g [G E]]. eexists; split; [exact E|].
  eapply Rle_trans; [apply sum_abs|]. apply sum_le. intros i Hi. rewrite Rabs_mult.
  apply Rmult_le_compat; auto using Rabs_pos.
Qed.

(* Attained (3): where every ∂x*/∂h_i keeps a sign and is at least c_i in magnitude, moving all h_i by delta_i to that side moves the target by at least Σ c_i delta_i. *)
Theorem target_surely_moved (n : nat) (target : vector -> R) (c delta sign h h' : vector) :
  let on t := target (fun i => h i + t * (h' i - h i)) in
  continuous_over (between 0 1) on ->
  (exists cuts, forall t, 0 < t < 1 -> ~ In t cuts -> exists g : vector,
     (forall i, (i < n)%nat -> c i <= sign i * g i) /\ is_derive on t (sum n (fun i => g i * (h' i - h i)))) ->
  (forall i, (i < n)%nat -> h' i - h i = sign i * delta i /\ 0 <= delta i) ->
  sum n (fun i => c i * delta i) <= Rabs (on 1 - on 0).
Proof.
  intros on C [cuts D] M. apply Rle_trans with (on 1 - on 0); [|apply Rle_abs].
  replace (sum n (fun i => c i * delta i)) with (sum n (fun i => c i * delta i) * (1 - 0)) by ring.
  apply (mean_below on 0 1 cuts); [lra|exact C|]. intros t Ht N. destruct (D t Ht N) as [g [G E]]. eexists; split; [exact E|].
  apply sum_le. intros i Hi. destruct (M i Hi) as [-> P]. specialize (G i Hi).
  replace (g i * (sign i * delta i)) with (sign i * g i * delta i) by ring. now apply Rmult_le_compat_r.
Qed.

(* Slopes at single points say nothing across a jump: the step from 0 to 1 has slope 0 wherever it has one. *)
Example slopes_across_a_jump :
  let f x := if Rle_dec x 0 then 0 else 1 in
  (forall a b, a <= b -> exists cuts, smooth_on a b cuts f (fun d => Rabs d <= 0)) /\ ~ Rabs (f 1 - f (-1)) <= 0 * Rabs (1 - -1).
Proof.
  intro f. split.
  - intros a b _. exists (cons 0 nil). intros x _ N. exists 0. rewrite Rabs_R0. split; [|lra].
    assert (Hx : x <> 0) by (intros ->; apply N; now left).
    apply (is_derive_ext_loc (fun _ => f x)); [|apply (is_derive_const (V := R_NormedModule))].
    exists (mkposreal (Rabs x) (Rabs_pos_lt x Hx)). intros y Hy.
    unfold ball in Hy; cbn in Hy; unfold AbsRing_ball, abs, minus, plus, opp in Hy; cbn in Hy.
    unfold f. apply Rabs_def2 in Hy. revert Hy. unfold Rabs.
    destruct (Rcase_abs x), (Rle_dec x 0), (Rle_dec y 0); try reflexivity; lra.
  - unfold f. destruct (Rle_dec 1 0), (Rle_dec (-1) 0); try lra. rewrite Rminus_0_r, Rabs_R1. lra.
Qed.

(* A set that is not convex: |F′| <= 1/2 on two pieces, and what one piece is led to is far from the other. *)
Example slopes_without_convexity :
  let s x := x <= 0 \/ 1 <= x in let f x := if Rle_dec x (1 / 2) then 0 else 9 in
  (forall x, s x -> is_derive f x 0) /\ ~ Rabs (f 1 - f 0) <= 1 / 2 * Rabs (1 - 0).
Proof.
  intros s f. split.
  - intros x Hx. apply (is_derive_ext_loc (fun _ => f x)); [|apply (is_derive_const (V := R_NormedModule))].
    assert (P : 0 < 1 / 2) by lra. exists (mkposreal _ P). intros y Hy.
    unfold ball in Hy; cbn in Hy; unfold AbsRing_ball, abs, minus, plus, opp in Hy; cbn in Hy.
    apply Rabs_def2 in Hy. unfold f. destruct Hx, (Rle_dec x (1 / 2)), (Rle_dec y (1 / 2)); try reflexivity; lra.
  - unfold f. destruct (Rle_dec 1 (1 / 2)), (Rle_dec 0 (1 / 2)); try lra. rewrite !Rminus_0_r, Rabs_R1, Rabs_pos_eq; lra.
Qed.
