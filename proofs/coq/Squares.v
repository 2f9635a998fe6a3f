(** Weighted squares on a box: proofs/squares.md; Chebyshev polynomials: proofs/trajectory.md (3). *)
Require Import Reals Lra Lia List.
Open Scope R_scope.

(** Weighted squares: sums of weights >= 0 times products of the g that hold on the domain, times squares. *)
Fixpoint squares {A : Type} (terms : list (R * (A -> R) * (A -> R))) (x : A) : R :=
  match terms with nil => 0 | cons (weight, g, q) rest => weight * g x * (q x * q x) + squares rest x end.

(* Squares (1): if p − γ = Σ c_i g_i q_i² identically, c_i >= 0 and g_i >= 0 on the box (1 among them), then p >= γ on the box. *)
Theorem weighted_squares {A : Type} (dom : A -> Prop) (p : A -> R) (gamma : R) (terms : list (R * (A -> R) * (A -> R))) :
  (forall x, p x - gamma = squares terms x) ->
  List.Forall (fun t => 0 <= fst (fst t) /\ forall x, dom x -> 0 <= snd (fst t) x) terms -> forall x, dom x -> gamma <= p x.
Proof.
  intros E P x Hx. specialize (E x). assert (0 <= squares terms x); [|lra]. clear E.
  induction P as [|[[w g] q] rest [W G] _ IH]; cbn in *; [lra|].
  apply Rplus_le_le_0_compat; trivial. apply Rmult_le_pos; [apply Rmult_le_pos; auto|nra].
Qed.

(* A weight below 0 shows nothing: x² − 1 = x² + (−1)·1², and it is below 0 at 0. *)
Example negative_weight : (forall x, x * x - 1 = 1 * (x * x) + -1 * (1 * 1)) /\ 0 * 0 - 1 < 0.
Proof. split; intros; lra. Qed.

Fixpoint chebyshev (k : nat) (x : R) : R := match k with
  | O => 1
  | S k' => match k' with O => x | S k'' => 2 * x * chebyshev k' x - chebyshev k'' x end
  end.

Lemma chebyshev_cos t : forall k, chebyshev k (cos t) = cos (INR k * t) /\ chebyshev (S k) (cos t) = cos (INR (S k) * t).
Proof.
  induction k as [|k [A B]].
  - cbn [chebyshev]. rewrite Rmult_0_l, cos_0, Rmult_1_l. split; reflexivity.
  - split; [exact B|]. change (chebyshev (S (S k)) (cos t)) with (2 * cos t * chebyshev (S k) (cos t) - chebyshev k (cos t)).
    rewrite A, B. replace (INR (S (S k)) * t) with (INR (S k) * t + t) by (rewrite (S_INR (S k)); ring).
    replace (INR k * t) with (INR (S k) * t - t) by (rewrite (S_INR k); ring).
    rewrite cos_plus, cos_minus. ring.
Qed.

(* |T_k| <= 1 on [−1, 1]. *)
Theorem chebyshev_at_most_one (k : nat) (x : R) : -1 <= x <= 1 -> Rabs (chebyshev k x) <= 1.
Proof.
  intro X. rewrite <- (cos_acos x X). rewrite (proj1 (chebyshev_cos (acos x) k)).
  destruct (COS_bound (INR k * acos x)). unfold Rabs. destruct (Rcase_abs _); lra.
Qed.

(** Products T_{j_1}(t_1) … T_{j_n}(t_n). *)
Fixpoint chebyshevs (js : list nat) (t : list R) : R := match js, t with
  | j :: js, x :: t => chebyshev j x * chebyshevs js t
  | _, _ => 1
  end.

Fixpoint expansion (terms : list (R * list nat)) (t : list R) : R :=
  match terms with nil => 0 | (c, js) :: rest => c * chebyshevs js t + expansion rest t end.

Fixpoint magnitudes (terms : list (R * list nat)) : R := match terms with nil => 0 | (c, _) :: rest => Rabs c + magnitudes rest end.

Lemma chebyshevs_at_most_one js : forall t, List.Forall (fun x => -1 <= x <= 1) t -> Rabs (chebyshevs js t) <= 1.
Proof.
  induction js as [|j js IH]; intros [|x t] F; cbn; try (rewrite Rabs_R1; lra).
  inversion F as [|? ? X T]. rewrite Rabs_mult. assert (A := chebyshev_at_most_one j x X). assert (B := IH t T).
  assert (P := Rabs_pos (chebyshev j x)). assert (P' := Rabs_pos (chebyshevs js t)). nra.
Qed.

(* Squares (3): if |f − P| <= r on the box, P − p = Σ c_j T_j there and p >= γ, then f >= γ − r − Σ |c_j|. *)
Theorem stated_polynomial (dom : list R -> Prop) (f P p : list R -> R) (r gamma : R) (terms : list (R * list nat)) :
  (forall t, dom t -> List.Forall (fun x => -1 <= x <= 1) t) -> (forall t, dom t -> Rabs (f t - P t) <= r) ->
  (forall t, dom t -> P t - p t = expansion terms t) -> (forall t, dom t -> gamma <= p t) ->
  forall t, dom t -> gamma - r - magnitudes terms <= f t.
Proof.
  intros D F E G t Ht. specialize (F t Ht). specialize (G t Ht). specialize (E t Ht).
  assert (B : Rabs (expansion terms t) <= magnitudes terms).
  { clear E. induction terms as [|[c js] rest IH]; cbn; [rewrite Rabs_R0; lra|].
    eapply Rle_trans; [apply Rabs_triang|]. apply Rplus_le_compat; trivial. rewrite Rabs_mult.
    assert (A := chebyshevs_at_most_one js t (D t Ht)). assert (P0 := Rabs_pos c). nra. }
  revert F B. unfold Rabs. repeat destruct (Rcase_abs _); lra.
Qed.

(* Squares (4): what two arguments show of one range lies in their intersection. *)
Theorem two_arguments (y p q p' q' : R) : p <= y <= q -> p' <= y <= q' -> Rmax p p' <= y <= Rmin q q'.
Proof. intros A B. split; [apply Rmax_lub|apply Rmin_glb]; lra. Qed.
