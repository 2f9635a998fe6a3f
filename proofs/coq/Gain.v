(** Gains that contract: proofs/sensitivity-gain.md. *)
Require Import Reals Lra.
From Ultibound Require Import Bound.
Open Scope R_scope.

(** k(κ), the larger of |1 − κσ_0| and |1 − κσ_1|. *)
Definition rate (sigma0 sigma1 kappa : R) : R := Rmax (Rabs (1 - kappa * sigma0)) (Rabs (1 - kappa * sigma1)).

(* Gains (2): for σ in [σ_0, σ_1] the factor |1 − κσ| of the error is at most k(κ). *)
Theorem factor_of_error (sigma0 sigma1 sigma kappa : R) : sigma0 <= sigma <= sigma1 -> 0 <= kappa ->
  Rabs (1 - kappa * sigma) <= rate sigma0 sigma1 kappa.
Proof.
  intros S K. unfold rate.
  assert (A := Rmax_l (Rabs (1 - kappa * sigma0)) (Rabs (1 - kappa * sigma1))). assert (B := Rmax_r (Rabs (1 - kappa * sigma0)) (Rabs (1 - kappa * sigma1))).
  apply Rabs_ends in A. apply Rabs_ends in B. apply Rabs_le. nra.
Qed.

(* Gains (2): with 0 < σ_0 <= σ_1, every κ > 0 below 2/σ_1 contracts: k(κ) < 1. *)
Theorem gain_contracts (sigma0 sigma1 kappa : R) : 0 < sigma0 <= sigma1 -> 0 < kappa -> kappa < 2 / sigma1 -> rate sigma0 sigma1 kappa < 1.
Proof.
  intros S K L. assert (P : kappa * sigma1 < 2).
  { apply (Rmult_lt_compat_r sigma1) in L; [|lra]. unfold Rdiv in L. rewrite Rmult_assoc, Rinv_l in L; lra. }
  unfold rate. apply Rmax_lub_lt; apply Rabs_def1; nra.
Qed.

(* Gains (2): no gain has a smaller k than (σ_1 − σ_0)/(σ_1 + σ_0), and 2/(σ_0 + σ_1) has that. *)
Theorem best_gain (sigma0 sigma1 : R) : 0 < sigma0 <= sigma1 ->
  (forall kappa, (sigma1 - sigma0) / (sigma1 + sigma0) <= rate sigma0 sigma1 kappa) /\
  rate sigma0 sigma1 (2 / (sigma0 + sigma1)) = (sigma1 - sigma0) / (sigma1 + sigma0).
Proof.
  intros S. assert (P : 0 < sigma1 + sigma0) by lra. split.
  - intro kappa. assert (A : 1 - kappa * sigma0 <= rate sigma0 sigma1 kappa) by (eapply Rle_trans; [apply Rle_abs|apply Rmax_l]).
    assert (B : - (1 - kappa * sigma1) <= rate sigma0 sigma1 kappa).
    { eapply Rle_trans; [apply Rle_abs|]. rewrite Rabs_Ropp. apply Rmax_r. }
    apply (Rmult_le_reg_r (sigma1 + sigma0)); trivial. unfold Rdiv. rewrite Rmult_assoc, Rinv_l by lra. nra.
  - unfold rate. replace (1 - 2 / (sigma0 + sigma1) * sigma0) with ((sigma1 - sigma0) / (sigma1 + sigma0)) by (field; lra).
    replace (1 - 2 / (sigma0 + sigma1) * sigma1) with (- ((sigma1 - sigma0) / (sigma1 + sigma0))) by (field; lra).
    rewrite Rabs_Ropp, Rmax_left by lra. apply Rabs_pos_eq. apply Rmult_le_pos; [lra|]. apply Rlt_le, Rinv_0_lt_compat; lra.
Qed.

(* At 2/σ_1 itself a gain does not contract: with σ_0 = σ_1 = 1 and κ = 2, k is 1. *)
Example no_contraction_at_the_end : rate 1 1 2 = 1.
Proof. unfold rate. replace (1 - 2 * 1) with (- (1)) by ring. rewrite Rabs_Ropp, Rabs_R1. apply Rmax_left. lra. Qed.
