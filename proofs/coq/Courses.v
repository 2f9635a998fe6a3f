(** Several steps: proofs/horizon.md, proofs/orbit.md, proofs/several.md (7), proofs/graph.md (9), proofs/attained.md. *)
Require Import Reals Lra Lia.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Bound Mean Vectors Norms Comparison Sets.
Open Scope R_scope.

Lemma shifted m x h n : trajectory m x h -> trajectory m (fun i => x (n + i)%nat) (fun i => h (n + i)%nat).
Proof. intros T i. replace (n + S i)%nat with (S (n + i)) by lia. apply T. Qed.

(** After j steps from the set: |e| <= k|e_0| + eps. *)
Definition after (m : model) (s : set m) (j : nat) (k eps : R) : Prop := forall x h, trajectory m x h -> s (x O) (h O) ->
  error m (x j) (h j) <= k * error m (x O) (h O) + eps.

Lemma after_at m s j k eps x h n : after m s j k eps -> trajectory m x h -> s (x n) (h n) ->
  error m (x (n + j)%nat) (h (n + j)%nat) <= k * error m (x n) (h n) + eps.
Proof.
  intros A T S0. assert (G := A _ _ (shifted m x h n T)). cbv beta in G. rewrite Nat.add_0_r in G. now apply G.
Qed.

Lemma ends_kept m N r k eps : 0 <= k -> after m (ball m r) N k eps -> k * r + eps <= r ->
  forall x h, trajectory m x h -> ball m r (x O) (h O) -> forall q, ball m r (x (q * N)%nat) (h (q * N)%nat).
Proof.
  intros Hk A K x h T S0. induction q as [|q IH]; [exact S0|].
  assert (G := after_at m _ N k eps x h (q * N) A T IH). replace (S q * N)%nat with (q * N + N)%nat by lia.
  unfold ball in *. apply (Rmult_le_compat_l k) in IH; trivial. lra.
Qed.

(* Horizon (1): if ‖Φ_N(x) − x*(h_1)‖ <= k‖e_1‖ + eps' and the target moves by at most d in a step, the error after N steps is at most k‖e_1‖ + eps' + d. *)
Theorem horizon_pair (nm : vector -> R) (k eps d : R) (x first before after' : vector) (e : R) :
  (forall u v, nm (fun i => u i + v i) <= nm u + nm v) -> (forall u v, (forall i, u i = v i) -> nm u = nm v) ->
  nm (subtract (subtract x (subtract before first)) first) <= k * e + eps -> nm (subtract before after') <= d ->
  nm (subtract x after') <= k * e + (eps + d).
Proof.
  intros T E P D. rewrite (E (subtract x after')
    (fun i => subtract (subtract x (subtract before first)) first i + subtract before after' i)).
  - eapply Rle_trans; [apply T|]. lra.
  - intro i. unfold subtract. ring.
Qed.

(** Errors led by k < 1 every N steps, from step n0 on. *)
Lemma every_phase (e : nat -> R) (N n0 : nat) (k eps : R) : (0 < N)%nat -> 0 <= k < 1 -> 0 <= eps ->
  (forall n, (n0 <= n)%nat -> e (n + N)%nat <= k * e n + eps) ->
  forall q r, (n0 <= r)%nat -> e (r + q * N)%nat <= k ^ q * Rmax (e r) 0 + eps / (1 - k).
Proof.
  intros HN Hk He L q r Hr. assert (Q : 0 <= eps / (1 - k)) by (apply Rmult_le_pos; [trivial|left; apply Rinv_0_lt_compat; lra]).
  induction q as [|q IH]; [rewrite Nat.mul_0_l, Nat.add_0_r; cbn; generalize (Rmax_l (e r) 0); lra|].
  replace (r + S q * N)%nat with ((r + q * N) + N)%nat by lia. eapply Rle_trans; [apply L; lia|].
  apply (Rmult_le_compat_l k) in IH; [|lra].
  replace (eps / (1 - k)) with (k * (eps / (1 - k)) + eps) by (field; lra). cbn [pow]. lra.
Qed.

Lemma phases_bounded (e : nat -> R) (N n0 : nat) (k eps D b : R) : (0 < N)%nat -> 0 <= k < 1 -> 0 <= eps -> eps / (1 - k) < b ->
  exists M, forall e : nat -> R, (forall n, (n0 <= n)%nat -> e (n + N)%nat <= k * e n + eps) ->
  (forall n, (n0 <= n < n0 + N)%nat -> e n <= D) -> forall n, (n0 + M <= n)%nat -> e n < b.
Proof.
  intros HN Hk He Hb. set (g := b - eps / (1 - k)). assert (Hg : 0 < g) by (unfold g; lra).
  destruct (pow_lt_1_zero k ltac:(rewrite Rabs_pos_eq; lra) (g / (Rabs D + 1))) as [Q HQ].
  { apply Rdiv_lt_0_compat; trivial. generalize (Rabs_pos D); lra. }
  exists (Q * N)%nat. intros f L B n Hn.
  set (q := ((n - n0) / N)%nat). set (r := (n0 + (n - n0) mod N)%nat).
  assert (E : n = (r + q * N)%nat).
  { unfold r, q. assert (A := Nat.div_mod (n - n0) N ltac:(lia)). lia. }
  assert (Hr : (n0 <= r < n0 + N)%nat) by (unfold r; assert (A := Nat.mod_upper_bound (n - n0) N ltac:(lia)); lia).
  assert (Hq : (Q <= q)%nat) by (unfold q; apply Nat.div_le_lower_bound; lia).
  rewrite E. eapply Rle_lt_trans; [apply (every_phase f N n0 k eps HN Hk He L q r); lia|].
  specialize (HQ q Hq). rewrite Rabs_pos_eq in HQ by (apply pow_le; lra).
  assert (P : 0 < Rabs D + 1) by (generalize (Rabs_pos D); lra).
  assert (A : k ^ q * Rmax (f r) 0 <= k ^ q * (Rabs D + 1)).
  { apply Rmult_le_compat_l; [apply pow_le; lra|]. specialize (B r Hr). generalize (Rle_abs D). apply Rmax_case; lra. }
  apply (Rmult_lt_compat_r (Rabs D + 1)) in HQ; trivial.
  replace (g / (Rabs D + 1) * (Rabs D + 1)) with g in HQ by (field; lra). unfold g in *. lra.
Qed.

(* Horizon (2c): with k_j R + eps_j <= R' for every step j below N and kR + eps <= R, every state on the way is within R' of its target. *)
Theorem on_the_way (m : model) (N : nat) (r r' : R) (k eps : nat -> R) : (0 < N)%nat -> r <= r' ->
  (forall j, (0 < j <= N)%nat -> 0 <= k j /\ after m (ball m r) j (k j) (eps j)) ->
  (forall j, (0 < j < N)%nat -> k j * r + eps j <= r') -> k N * r + eps N <= r ->
  forall x h, trajectory m x h -> ball m r (x O) (h O) ->
  (forall q, ball m r (x (q * N)%nat) (h (q * N)%nat)) /\ forall n, ball m r' (x n) (h n).
Proof.
  intros HN Hr A W K x h T S0.
  assert (Ends := ends_kept m N r _ _ (proj1 (A N ltac:(lia))) (proj2 (A N ltac:(lia))) K x h T S0).
  split; [exact Ends|]. intro n. assert (E := Nat.div_mod n N ltac:(lia)). assert (U := Nat.mod_upper_bound n N ltac:(lia)).
  set (q := (n / N)%nat) in *. set (j := (n mod N)%nat) in *. specialize (Ends q). rewrite E, Nat.mul_comm.
  destruct (Nat.eq_dec j 0) as [->|Nj]; [rewrite Nat.add_0_r; unfold ball in *; lra|].
  destruct (A j ltac:(lia)) as [Hk B]. assert (G := after_at m _ j _ _ x h (q * N) B T Ends). specialize (W j ltac:(lia)). unfold ball in *.
  apply (Rmult_le_compat_l (k j)) in Ends; trivial. lra.
Qed.

(* Horizon (3), with (2a), (2b): where every step starts in the set, the bound of N steps holds at all steps. *)
Theorem horizon_bound (m : model) (s : set m) (N : nat) (k eps : R) : (0 < N)%nat -> 0 <= k < 1 -> 0 <= eps ->
  kept m s -> bounded m s -> after m s N k eps -> ultimate m s (eps / (1 - k)).
Proof.
  intros HN Hk He K [D HD] A b Hb. destruct (phases_bounded (fun _ => 0) N O k eps D b HN Hk He Hb) as [M HM].
  exists M. intros x h T S0 n Hn. assert (In := stays m s K x h T S0).
  apply (HM (fun n => error m (x n) (h n))); [|intros; now apply HD|lia].
  intros i _. now apply (after_at m s).
Qed.

(** β bounds the error at the ends of horizons in the long run. *)
Definition ultimate_at_ends (m : model) (s : set m) (N : nat) (beta : R) : Prop := forall b, beta < b -> exists M,
  forall x h, trajectory m x h -> s (x O) (h O) -> forall q, (M <= q)%nat -> error m (x (q * N)%nat) (h (q * N)%nat) < b.

Lemma slack N (k eps : nat -> R) (beta r : R) : (forall j, (j < N)%nat -> 0 <= k j /\ k j * beta + eps j < r) ->
  exists u, 0 < u /\ forall j, (j < N)%nat -> k j * (beta + u) + eps j < r.
Proof.
  intro H. destruct (common N (fun j u => k j * (beta + u) + eps j < r)) as [u [Hu A]].
  - intros j Hj. destruct (H j Hj) as [P L]. exists ((r - (k j * beta + eps j)) / (2 * (k j + 1))).
    split; [apply Rdiv_lt_0_compat; lra|]. intros v Hv.
    assert (k j * v <= (k j + 1) * ((r - (k j * beta + eps j)) / (2 * (k j + 1)))) by (apply Rmult_le_compat; lra).
    replace ((k j + 1) * (_ / _)) with ((r - (k j * beta + eps j)) / 2) in H0 by (field; lra). lra.
  - exists u; split; trivial. intros j Hj. apply A; trivial. lra.
Qed.

(* Horizon (3), with (2c): if k_j β + eps_j < R for every j below N (k_0 = 1, eps_0 = 0), the bound of N steps holds at all steps too. *)
Theorem horizon_bound_in_the_end (m : model) (N : nat) (r beta : R) (k eps : nat -> R) : (0 < N)%nat ->
  (forall j, (j < N)%nat -> 0 <= k j /\ after m (ball m r) j (k j) (eps j) /\ k j * beta + eps j < r) ->
  0 <= k N < 1 -> 0 <= eps N -> after m (ball m r) N (k N) (eps N) -> k N * r + eps N <= r -> ultimate_at_ends m (ball m r) N beta ->
  ultimate m (ball m r) (eps N / (1 - k N)).
Proof.
  intros HN A Hk He AN K U b Hb.
  destruct (slack N k eps beta r ltac:(intros j Hj; destruct (A j Hj) as [P [_ L]]; now split)) as [u [Hu Sl]].
  destruct (U (beta + u) ltac:(lra)) as [M HM].
  destruct (phases_bounded (fun _ => 0) N (M * N) (k N) (eps N) r b HN Hk He Hb) as [M' HM'].
  exists (M * N + M')%nat. intros x h T S0 n Hn. 
  assert (Ends := ends_kept m N r _ _ (proj1 Hk) AN K x h T S0).
  assert (At : forall q, (M <= q)%nat -> forall j, (j < N)%nat -> ball m r (x (q * N + j)%nat) (h (q * N + j)%nat)).
  { intros q Hq j Hj. destruct (A j Hj) as [P [B _]]. assert (G := after_at m _ j _ _ x h (q * N) B T (Ends q)).
    specialize (HM x h T S0 q Hq). specialize (Sl j Hj). unfold ball in *.
    assert (k j * error m (x (q * N)%nat) (h (q * N)%nat) <= k j * (beta + u)) by (apply Rmult_le_compat_l; lra). lra. }
  assert (In : forall n, (M * N <= n)%nat -> ball m r (x n) (h n)).
  { intros i Hi. assert (E := Nat.div_mod i N ltac:(lia)). assert (V := Nat.mod_upper_bound i N ltac:(lia)).
    rewrite E, Nat.mul_comm. apply At; trivial. apply Nat.div_le_lower_bound; lia. }
  apply (HM' (fun n => error m (x n) (h n))); [|intros i Hi; apply In; lia|lia].
  intros i Hi. apply (after_at m (ball m r)); trivial. now apply In.
Qed.

(* Horizon (3), else: with β at the ends and k_j, eps_j at the steps between, all steps stay below any number above all k_j β + eps_j (j from 0: β). *)
Theorem horizon_lift (m : model) (N : nat) (r beta top : R) (k eps : nat -> R) : (0 < N)%nat ->
  (forall j, (j < N)%nat -> 0 <= k j /\ after m (ball m r) j (k j) (eps j) /\ k j * beta + eps j <= top) ->
  0 <= k N -> after m (ball m r) N (k N) (eps N) -> k N * r + eps N <= r -> ultimate_at_ends m (ball m r) N beta ->
  ultimate m (ball m r) top.
Proof.
  intros HN A Hk AN K U b Hb.
  destruct (slack N k eps beta b ltac:(intros j Hj; destruct (A j Hj) as [P [_ L]]; split; [trivial|lra])) as [u [Hu Sl]].
  destruct (U (beta + u) ltac:(lra)) as [M HM]. exists (M * N)%nat. intros x h T S0 n Hn.
  assert (Ends := ends_kept m N r _ _ Hk AN K x h T S0).
  assert (E := Nat.div_mod n N ltac:(lia)). assert (V := Nat.mod_upper_bound n N ltac:(lia)).
  assert (Hq : (M <= n / N)%nat) by (apply Nat.div_le_lower_bound; lia).
  set (q := (n / N)%nat) in *. set (j := (n mod N)%nat) in *. rewrite E, Nat.mul_comm.
  destruct (A j V) as [P [B _]]. assert (G := after_at m _ j _ _ x h (q * N) B T (Ends q)).
  specialize (HM x h T S0 q Hq). specialize (Sl j V).
  assert (k j * error m (x (q * N)%nat) (h (q * N)%nat) <= k j * (beta + u)) by (apply Rmult_le_compat_l; lra). lra.
Qed.

(* Horizon (4): if every start of the N phases is in S and within a, and λ leads down in n rounds to b with λ(b) <= b: at most b from step n N on. *)
Theorem horizon_steps (m : model) (s : set m) (N : nat) (k eps : R) (a : nat -> R) (n : nat) (b : R) : (0 < N)%nat -> 0 <= k ->
  kept m s -> after m s N k eps -> (forall i, k * a i + eps <= a (S i)) -> a n <= b -> k * b + eps <= b ->
  forall x h, trajectory m x h -> s (x O) (h O) -> (forall j, (j < N)%nat -> error m (x j) (h j) <= a O) ->
  forall t, (n * N <= t)%nat -> error m (x t) (h t) <= b.
Proof.
  intros HN Hk K A Lv An B x h T S0 E0 t Ht. assert (In := stays m s K x h T S0).
  assert (V := Nat.mod_upper_bound t N ltac:(lia)). assert (E := Nat.div_mod t N ltac:(lia)).
  set (j := (t mod N)%nat) in *.
  assert (Down : forall q, error m (x (j + q * N)%nat) (h (j + q * N)%nat) <= a q /\ ((n <= q)%nat -> error m (x (j + q * N)%nat) (h (j + q * N)%nat) <= b)).
  { induction q as [|q [IH IH']].
    - rewrite Nat.mul_0_l, Nat.add_0_r. specialize (E0 j V). split; [exact E0|]. intro Z. replace n with O in An by lia. lra.
    - assert (G := after_at m s N k eps x h (j + q * N) A T (In _)).
      replace (j + S q * N)%nat with (j + q * N + N)%nat by lia. specialize (Lv q).
      assert (D : error m (x (j + q * N + N)%nat) (h (j + q * N + N)%nat) <= a (S q)).
      { apply (Rmult_le_compat_l k) in IH; trivial. lra. }
      split; [exact D|]. intro L. destruct (Nat.eq_dec n (S q)) as [->|Nq]; [lra|].
      specialize (IH' ltac:(lia)). apply (Rmult_le_compat_l k) in IH'; trivial. lra. }
  rewrite E, Nat.add_comm, (Nat.mul_comm N). apply Down. apply Nat.div_le_lower_bound; lia.
Qed.

(* A bound at the ends of horizons is none of every step: x⁺ = 3 up to 2 and 1 beyond has |e| <= 1 after two steps from within 2, and 3 between. *)
Example ends_say_nothing_between :
  let f x := if Rle_dec x 2 then 3 else 1 in let m := plain f in
  after m (ball m 2) 2 0 1 /\ exists x h, trajectory m x h /\ ball m 2 (x O) (h O) /\ forall n, error m (x (2 * n + 1)%nat) (h (2 * n + 1)%nat) = 3.
Proof.
  intros f m. split.
  - intros x h T S0. destruct (T O) as [_ [w [_ E]]]. destruct (T 1%nat) as [_ [w' [_ E']]].
    unfold ball in S0. cbn in *. rewrite Rminus_0_r in *. apply Rabs_ends in S0. rewrite E', E. unfold f.
    destruct (Rle_dec (x O) 2); [|lra]. destruct (Rle_dec 3 2); [lra|]. rewrite Rabs_pos_eq; lra.
  - exists (fun n => if Nat.even n then 1 else 3), (fun _ => tt). split; [|split].
    + intro n. split; [exact I|]. exists tt. split; [exact I|]. rewrite Nat.even_succ, <- Nat.negb_even. cbn. unfold f.
      destruct (Nat.even n); cbn; [destruct (Rle_dec 1 2)|destruct (Rle_dec 3 2)]; lra.
    + unfold ball. cbn. rewrite Rminus_0_r, Rabs_pos_eq; lra.
    + intro n. rewrite Nat.add_1_r, Nat.even_succ, <- Nat.negb_even, Nat.even_mul. cbn. rewrite Rminus_0_r, Rabs_pos_eq; lra.
Qed.

(** Orbits of one state: the map followed for p steps with values ws of the witness, the held quantities the same throughout. *)
Section Orbits.
Variables (W H : Type) (F : R -> W -> H -> R) (ws : nat -> W) (h : H).

Fixpoint followed (x : R) (j : nat) : R := match j with O => x | S j => F (followed x j) (ws j) h end.

Lemma fixed_point (f : R -> R) a b : a <= b -> continuous_over (between a b) f ->
  (a <= f a /\ f b <= b) \/ (f a <= a /\ b <= f b) -> exists x, between a b x /\ f x = x.
Proof.
  intros L C B.
  assert (G : forall g : R -> R, (forall x, continuity_pt g x) -> g a * g b <= 0 -> exists x, between a b x /\ g x = 0).
  { intros g Cg Sg. destruct (IVT_cor g a b Cg L Sg) as [z [Z E]]. now exists z. }
  destruct (G (fun x => f (clip a b x) - clip a b x)) as [x [I E]].
  - intro x. apply continuity_pt_minus; [now apply (continuous_clip f)|].
    apply (continuous_clip (fun x => x) a b L). intros y _ eps He. exists eps. split; trivial.
  - rewrite !clip_same by (unfold between; lra). nra.
  - exists x. split; trivial. rewrite clip_same in E by trivial. lra.
Qed.

(* Orbit (1): if P(a) >= a and P(b) <= b, or P(a) <= a and P(b) >= b, some x in [a, b] has P(x) = x: a trajectory from it repeats for ever. *)
Theorem orbit (p : nat) (a b : R) (inW : W -> Prop) (moves : H -> H -> Prop) (target : H -> R) : (0 < p)%nat -> a <= b ->
  continuous_over (between a b) (fun x => followed x p) ->
  (a <= followed a p /\ followed b p <= b) \/ (followed a p <= a /\ b <= followed b p) ->
  (forall j, (j < p)%nat -> inW (ws j)) -> moves h h ->
  exists x, trajectory (one_state F inW moves target) x (fun _ => h) /\ between a b (x O) /\
    forall q j, (j < p)%nat -> x (j + q * p)%nat = followed (x O) j.
Proof.
  intros Hp L C B Iw Mv. destruct (fixed_point _ a b L C B) as [x [I E]].
  exists (fun n => followed x (n mod p)). split; [|split].
  - intro n. split; [exact Mv|]. exists (ws (n mod p)). split; [apply Iw, Nat.mod_upper_bound; lia|]. cbn.
    destruct (Nat.eq_dec (S (n mod p)) p) as [Z|Z].
    + replace (S n mod p)%nat with O; [|].
      * change (x = followed x (S (n mod p))). now rewrite Z, E.
      * assert (A := Nat.div_mod n p ltac:(lia)). apply (Nat.mod_unique _ _ (S (n / p))); nia.
    + replace (S n mod p)%nat with (S (n mod p)); [reflexivity|].
      assert (A := Nat.div_mod n p ltac:(lia)). assert (U := Nat.mod_upper_bound n p ltac:(lia)).
      apply (Nat.mod_unique _ _ (n / p)); lia.
  - rewrite Nat.mod_0_l by lia. exact I.
  - intros q j Hj. rewrite Nat.mod_0_l by lia. cbn. f_equal. rewrite Nat.mod_add by lia. now apply Nat.mod_small.
Qed.
End Orbits.

(* Orbit (1): an error of at least q again and again leaves no ultimate bound below q. *)
Theorem again_and_again (m : model) (s : set m) (q b : R) x h : trajectory m x h -> s (x O) (h O) ->
  (forall N, exists n, (N <= n)%nat /\ q <= error m (x n) (h n)) -> ultimate m s b -> q <= b.
Proof.
  intros T S0 A U. apply Rnot_lt_le. intro L. destruct (U q L) as [N HN]. destruct (A N) as [n [Hn E]].
  specialize (HN x h T S0 n Hn). lra.
Qed.

(* Orbit (2): a trajectory of n steps from within a whose error at the end is above c refutes that the error stays within c. *)
Theorem path (m : model) (s : set m) (a c : R) (n : nat) x h : trajectory m x h -> s (x O) (h O) -> error m (x O) (h O) <= a ->
  c < error m (x n) (h n) ->
  ~ (forall x h, trajectory m x h -> s (x O) (h O) -> error m (x O) (h O) <= a -> forall t, (n <= t)%nat -> error m (x t) (h t) <= c).
Proof. intros T S0 A L H. specialize (H x h T S0 A n (le_n n)). lra. Qed.

(* One end led inward is not enough: x + 1 on [0, 1] has P(0) >= 0, and no fixed point. *)
Example one_end_is_not_enough : (0 <= 0 + 1) /\ forall x, x + 1 <> x.
Proof. split; [lra|]. intros x E. lra. Qed.

(* Attained (1): a value y in [p, q] taken in the domain: the supremum is at least p, the infimum at most q, that of |f| at least max(p, −q, 0). *)
Theorem attained {A : Type} (dom : A -> Prop) (f : A -> R) (x : A) (p q : R) : dom x -> p <= f x <= q ->
  (forall u, (forall z, dom z -> f z <= u) -> p <= u) /\ (forall l, (forall z, dom z -> l <= f z) -> l <= q) /\
  (forall u, (forall z, dom z -> Rabs (f z) <= u) -> Rmax (Rmax p (- q)) 0 <= u).
Proof.
  intros D E. repeat split; intros u U; specialize (U x D); try lra. apply Rabs_ends in U. repeat apply Rmax_lub; lra.
Qed.

(* Attained (2): `f < c` on the domain is false if p >= c is attained; `f <= c` if p > c; likewise for `>` and `>=` from above. *)
Theorem refuted_at_a_point {A : Type} (dom : A -> Prop) (f : A -> R) (x : A) (p q c : R) : dom x -> p <= f x <= q ->
  (c <= p -> ~ forall z, dom z -> f z < c) /\ (c < p -> ~ forall z, dom z -> f z <= c) /\
  (q <= c -> ~ forall z, dom z -> c < f z) /\ (q < c -> ~ forall z, dom z -> c <= f z).
Proof. intros D E. repeat split; intros L H; specialize (H x D); lra. Qed.

(* Attained (3): a route's residual bounds |F(x*, w) − x*⁺| at zero error, so what is surely missed there is at most the residual. *)
Theorem residual_attained (m : model) (s : set m) (k eps : R) x h h' w : pair m s k eps -> s x h -> admissible m w ->
  may_become m h h' -> error m x h = 0 -> error m (map m x w h) h' <= eps.
Proof. intros P Sx A M Z. specialize (P x h h' w Sx A M). rewrite Z in P. lra. Qed.

(* Attained (4): with k_0 <= k and eps_0 <= eps attained and k < 1, eps/(1 − k) is at least eps_0/(1 − k_0). *)
Theorem bound_attained (k0 k e0 e : R) : k0 <= k < 1 -> 0 <= e0 <= e -> e0 / (1 - k0) <= e / (1 - k).
Proof.
  intros K E. apply (Rmult_le_reg_r ((1 - k) * (1 - k0))); [apply Rmult_lt_0_compat; lra|].
  replace (e0 / (1 - k0) * ((1 - k) * (1 - k0))) with (e0 * (1 - k)) by (field; lra).
  replace (e / (1 - k) * ((1 - k) * (1 - k0))) with (e * (1 - k0)) by (field; lra). nra.
Qed.

(** Products of Jacobians in a norm ‖e‖ = |V e| with V square; J_1 is the first step. *)
Fixpoint chain (n : nat) (js : nat -> matrix) (m : nat) : matrix :=
  match m with O => fun i j => if Nat.eqb i j then 1 else 0 | S m => product n (js m) (chain n js m) end.

Definition trace (n : nat) (a : matrix) : R := sum n (fun i => a i i).

Lemma chain_contracts n m0 len v js k m : 0 <= k -> supported m0 len ->
  (forall i e, norm n len v (times n (js i) e) <= k * norm n len v e) ->
  forall e, norm n len v (times n (chain n js m) e) <= k ^ m * norm n len v e.
Proof.
  intros Hk S K e. induction m as [|m IH].
  - rewrite pow_O, Rmult_1_l. right. unfold norm. apply (supported_ext m0); trivial. intros i _.
    apply times_ext. intros j Hj. unfold times; cbn. rewrite (sum_single n _ j Hj).
    + rewrite Nat.eqb_refl. ring.
    + intros q _ N. apply not_eq_sym, Nat.eqb_neq in N. rewrite N. ring.
  - cbn [chain pow]. apply Rle_trans with (norm n len v (times n (js m) (times n (chain n js m) e))).
    + right. unfold norm. apply (supported_ext m0); trivial. intros i _. apply times_ext. intros j _. symmetry. apply times_times.
    + eapply Rle_trans; [apply K|]. rewrite Rmult_assoc. now apply Rmult_le_compat_l.
Qed.

Lemma trace_cyclic n a b : trace n (product n a b) = trace n (product n b a).
Proof.
  unfold trace, product. rewrite sum_swap. apply sum_ext. intros i _. apply sum_ext. intros; ring.
Qed.

(* Several (7), V square: a gain k of every Jacobian in the norm |V e|, largest magnitude or length, has n kᵐ >= |tr J_m ⋯ J_1|. *)
Theorem trace_of_a_product (n : nat) (len : vector -> R) (l v : matrix) (js : nat -> matrix) (k : R) (m : nat) :
  len = largest n \/ len = euclidean n -> left_inverse n n l v -> left_inverse n n v l -> 0 <= k ->
  (forall i e, norm n len v (times n (js i) e) <= k * norm n len v e) -> Rabs (trace n (chain n js m)) <= INR n * k ^ m.
Proof.
  intros T E E' Hk K.
  assert (S : supported n len) by (destruct T as [->| ->]; [apply largest_supported|apply euclidean_supported]).
  assert (Cn := chain_contracts n n len v js k m Hk S K). set (a := chain n js m) in *. set (c := k ^ m) in *.
  assert (Hc : 0 <= c) by (apply pow_le; trivial).
  (* tr A = tr V A L, whose entries on the diagonal are at most c *)
  assert (Tr : trace n a = sum n (fun i => times n v (times n a (times n l (fun j => if Nat.eqb j i then 1 else 0))) i)).
  { assert (Col : forall i, (i < n)%nat -> forall q, times n l (fun j => if Nat.eqb j i then 1 else 0) q = l q i).
    { intros i Hi q. unfold times. rewrite (sum_single n _ i Hi); [rewrite Nat.eqb_refl; ring|].
      intros j _ N. apply Nat.eqb_neq in N. rewrite N. ring. }
    transitivity (trace n (product n v (product n a l))).
    - rewrite trace_cyclic. unfold trace. apply sum_ext. intros i Hi.
      assert (Q : product n (product n a l) v i i = product n a (product n l v) i i).
      { unfold product. rewrite (sum_ext n _ (fun k0 => sum n (fun k1 => a i k1 * l k1 k0 * v k0 i))).
        2:{ intros; rewrite <- sum_scale_r; reflexivity. }
        rewrite sum_swap. apply sum_ext. intros j _. rewrite <- sum_scale. apply sum_ext; intros; ring. }
      rewrite Q. unfold product at 1. rewrite (sum_single n _ i Hi).
      + rewrite (E i i Hi Hi), Nat.eqb_refl. ring.
      + intros j Hj N. rewrite (E j i Hj Hi). apply Nat.eqb_neq in N. rewrite N. ring.
    - unfold trace. apply sum_ext. intros i Hi. unfold product at 1. unfold times at 1. apply sum_ext. intros j _. f_equal.
      unfold product, times. apply sum_ext. intros q _. f_equal. symmetry. apply (Col i Hi). }
  rewrite Tr. eapply Rle_trans; [apply sum_abs|]. rewrite <- sum_const. apply sum_le. intros i Hi.
  set (u := fun j => if Nat.eqb j i then 1 else 0).
  assert (Len : len (times n v (times n l u)) = 1).
  { rewrite (supported_ext n len _ u S) by (intros j Hj; apply (recovered n n v l u j E' Hj)).
    assert (U : forall j, Rabs (u j) <= 1) by (intro j; unfold u; destruct (Nat.eqb j i); rewrite ?Rabs_R1, ?Rabs_R0; lra).
    assert (Ui : u i = 1) by (unfold u; now rewrite Nat.eqb_refl).
    destruct T as [->| ->].
    - apply Rle_antisym; [apply largest_le; [lra|intros; apply U]|]. rewrite <- Rabs_R1, <- Ui. now apply largest_ge.
    - unfold euclidean, dot. rewrite (sum_single n _ i Hi); [rewrite Ui, Rmult_1_l; apply sqrt_1|].
      intros j _ N. unfold u. apply Nat.eqb_neq in N. rewrite N. ring. }
  assert (G := Cn (times n l u)). unfold norm in G. rewrite Len, Rmult_1_r in G. eapply Rle_trans; [|exact G].
  set (y := times n v (times n a (times n l u))).
  destruct T as [->| ->]; [now apply largest_ge|].
  rewrite <- sqrt_Rsqr_abs. unfold euclidean. apply sqrt_le_1_alt. unfold Rsqr.
  apply (sum_term n (fun i => y i * y i) i Hi). intros; nra.
Qed.

Lemma gains_nonnegative k m : (forall j, 0 <= k j) -> 0 <= gains k m.
Proof. intro K. induction m; cbn; [lra|now apply Rmult_le_pos]. Qed.

Lemma chain_through_stances n m0 len (v : nat -> matrix) js k m : (forall j, 0 <= k j) -> supported m0 len ->
  (forall j e, norm n len (v (S j)) (times n (js j) e) <= k j * norm n len (v j) e) ->
  forall e, norm n len (v m) (times n (chain n js m) e) <= gains k m * norm n len (v O) e.
Proof.
  intros Hk S K e. induction m as [|m IH].
  - cbn [gains]. rewrite Rmult_1_l. right. unfold norm. apply (supported_ext m0); trivial. intros i _.
    apply times_ext. intros j Hj. unfold times; cbn. rewrite (sum_single n _ j Hj).
    + rewrite Nat.eqb_refl. ring.
    + intros q _ N. apply not_eq_sym, Nat.eqb_neq in N. rewrite N. ring.
  - cbn [chain gains]. apply Rle_trans with (norm n len (v (Datatypes.S m)) (times n (js m) (times n (chain n js m) e))).
    + right. unfold norm. apply (supported_ext m0); trivial. intros i _. apply times_ext. intros j _. symmetry. apply times_times.
    + eapply Rle_trans; [apply K|]. rewrite Rmult_assoc. now apply Rmult_le_compat_l.
Qed.

(* Stances (9), V square: Jacobians with gains k_j >= 0 from the norm of each stance to that of the next, back to the first one's: n (k_1 ⋯ k_m)ᵖ >= |tr (J_m ⋯ J_1)ᵖ|. *)
Theorem trace_around_a_walk (n : nat) (len : vector -> R) (l : matrix) (v js : nat -> matrix) (k : nat -> R) (m p : nat) :
  len = largest n \/ len = euclidean n -> left_inverse n n l (v O) -> left_inverse n n (v O) l -> v m = v O -> (forall j, 0 <= k j) ->
  (forall j e, norm n len (v (S j)) (times n (js j) e) <= k j * norm n len (v j) e) ->
  Rabs (trace n (chain n (fun _ => chain n js m) p)) <= INR n * gains k m ^ p.
Proof.
  intros T E E' Back Hk K. apply (trace_of_a_product n len l (v O)); trivial; [now apply gains_nonnegative|].
  intros _ e. rewrite <- Back at 1. apply (chain_through_stances n n); trivial.
  destruct T as [->| ->]; [apply largest_supported|apply euclidean_supported].
Qed.
