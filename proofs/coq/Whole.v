(** Lines put together: what a certificate of one state, route slope, amounts to (proofs/ultimate-bound.md, proofs/slope.md, proofs/invariant-set.md). *)
Require Import Reals Lra.
From Ultibound Require Import Bound Mean Slope Sets.
Open Scope R_scope.

(* Ball, slope, invariant-ball and ultimate-bound together: for every b > (m + d)/(1 − k) one N serves all starts within R of their target. *)
Theorem certificate_of_one_state {W H : Type} (F : R -> W -> H -> R) (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R)
  (lo hi p q r k m d : R) : let s : R -> H -> Prop := fun x h => Rabs (x - target h) <= r in
  (forall h, p <= target h <= q) -> 0 <= r <= Rmin (p - lo) (hi - q) -> 0 <= k < 1 -> 0 <= m + d -> k * r + (m + d) <= r ->
  (forall h w, inW w -> slopes_at_most (fun x => s x h) (fun x => F x w h) k) ->
  (forall h w, inW w -> Rabs (F (target h) w h - target h) <= m) -> (forall h h', moves h h' -> Rabs (target h' - target h) <= d) ->
  (forall x h, s x h -> lo <= x <= hi) /\ ultimate (one_state F inW moves target) s ((m + d) / (1 - k)).
Proof.
  intros s T Hr Hk He K Sl M D. split.
  - intros x h Sx. apply (ball_in_region lo hi p q r (target h) x (T h) (proj2 Hr) Sx).
  - assert (P : pair (one_state F inW moves target) s k (m + d)).
    { apply slope_pair; trivial. intro h. split.
      - intros x y z Sx Sy Z. unfold s in *. apply Rabs_ends in Sx. apply Rabs_ends in Sy. apply Rabs_le. lra.
      - unfold s. rewrite Rminus_diag_eq, Rabs_R0 by reflexivity. lra. }
    apply (ultimate_bound (one_state F inW moves target) s k (m + d) Hk He); trivial.
    + apply (invariant_ball (one_state F inW moves target) k (m + d) r); trivial. lra.
    + exists r. intros x h Sx. exact Sx.
Qed.
