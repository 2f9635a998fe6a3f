(** Outward rounding on whole numbers over a power of two: proofs/rounding.md. *)
Require Import Reals ZArith Lra Lia.
From Coquelicot Require Import Coquelicot.
From Ultibound Require Import Vectors.
Open Scope R_scope.

(** (p, q) means [p, q]/unit, unit = 2^bits. *)
Definition holds (unit : R) (i : Z * Z) (u : R) : Prop := IZR (fst i) <= u * unit <= IZR (snd i).

Lemma floor_le (a b : Z) : (0 < b)%Z -> IZR (a / b) <= IZR a / IZR b.
Proof.
  intro P. assert (Pb : 0 < IZR b) by (apply (IZR_lt 0); trivial). apply (Rmult_le_reg_r (IZR b)); trivial.
  unfold Rdiv. rewrite Rmult_assoc, Rinv_l, Rmult_1_r, <- mult_IZR by lra. apply IZR_le.
  rewrite Z.mul_comm. now apply Z.mul_div_le.
Qed.

Lemma floor_gt (a b : Z) : (0 < b)%Z -> IZR a / IZR b < IZR (a / b) + 1.
Proof.
  intro P. assert (Pb : 0 < IZR b) by (apply (IZR_lt 0); trivial). apply (Rmult_lt_reg_r (IZR b)); trivial.
  unfold Rdiv. rewrite Rmult_assoc, Rinv_l, Rmult_1_r by lra. rewrite <- (plus_IZR _ 1), <- mult_IZR. apply IZR_lt.
  rewrite Z.mul_comm. rewrite Z.add_1_r. now apply Z.mul_succ_div_gt.
Qed.

(** Rounded up: minus down of minus. *)
Lemma ceiling_ge (a b : Z) : (0 < b)%Z -> IZR a / IZR b <= IZR (- (- a / b)).
Proof.
  intro P. assert (F := floor_le (- a) b P). rewrite opp_IZR. rewrite opp_IZR in F.
  unfold Rdiv in *. lra.
Qed.

Lemma between_corners (p q r s u v : R) : p <= u <= q -> r <= v <= s ->
  Rmin (Rmin (p * r) (p * s)) (Rmin (q * r) (q * s)) <= u * v <= Rmax (Rmax (p * r) (p * s)) (Rmax (q * r) (q * s)).
Proof.
  intros U V.
  assert (L : forall a b c d, Rmin (Rmin a b) (Rmin c d) <= a /\ Rmin (Rmin a b) (Rmin c d) <= b /\ Rmin (Rmin a b) (Rmin c d) <= c /\ Rmin (Rmin a b) (Rmin c d) <= d).
  { intros. unfold Rmin. repeat destruct (Rle_dec _ _); lra. }
  assert (G : forall a b c d, a <= Rmax (Rmax a b) (Rmax c d) /\ b <= Rmax (Rmax a b) (Rmax c d) /\ c <= Rmax (Rmax a b) (Rmax c d) /\ d <= Rmax (Rmax a b) (Rmax c d)).
  { intros. unfold Rmax. repeat destruct (Rle_dec _ _); lra. }
  destruct (L (p * r) (p * s) (q * r) (q * s)) as [L1 [L2 [L3 L4]]]. destruct (G (p * r) (p * s) (q * r) (q * s)) as [G1 [G2 [G3 G4]]].
  set (lo := Rmin _ _) in *. set (hi := Rmax _ _) in *.
  assert (E1 : lo <= u * r <= hi) by (destruct (Rle_dec 0 r); nra). assert (E2 : lo <= u * s <= hi) by (destruct (Rle_dec 0 s); nra).
  destruct (Rle_dec 0 u); nra.
Qed.

(* Scaled: sum, difference and negation are exact. *)
Theorem scaled_sum (unit u v : R) (i j : Z * Z) : holds unit i u -> holds unit j v ->
  holds unit (fst i + fst j, snd i + snd j)%Z (u + v) /\ holds unit (fst i - snd j, snd i - fst j)%Z (u - v) /\ holds unit (- snd i, - fst i)%Z (- u).
Proof. unfold holds; cbn. intros U V. rewrite !plus_IZR, !minus_IZR, !opp_IZR. repeat split; lra. Qed.

(* Scaled: a product lies between the least of the four products of ends, rounded down, and the greatest, rounded up. *)
Theorem scaled_product (unit : Z) (u v : R) (i j : Z * Z) (low high : Z) : (0 < unit)%Z -> holds (IZR unit) i u -> holds (IZR unit) j v ->
  (forall a b, (a = fst i \/ a = snd i) -> (b = fst j \/ b = snd j) -> (low <= a * b <= high)%Z) ->
  holds (IZR unit) (low / unit, - (- high / unit))%Z (u * v).
Proof.
  intros P U V C. unfold holds in *; cbn in *. assert (Pu : 0 < IZR unit) by (apply (IZR_lt 0); trivial).
  assert (B := between_corners _ _ _ _ _ _ U V).
  assert (Cr : forall a b, (a = fst i \/ a = snd i) -> (b = fst j \/ b = snd j) -> IZR low <= IZR a * IZR b <= IZR high).
  { intros a b A Bb. destruct (C a b A Bb) as [L H]. rewrite <- mult_IZR. split; now apply IZR_le. }
  assert (C1 := Cr (fst i) (fst j) (or_introl eq_refl) (or_introl eq_refl)). assert (C2 := Cr (fst i) (snd j) (or_introl eq_refl) (or_intror eq_refl)).
  assert (C3 := Cr (snd i) (fst j) (or_intror eq_refl) (or_introl eq_refl)). assert (C4 := Cr (snd i) (snd j) (or_intror eq_refl) (or_intror eq_refl)).
  assert (Q : IZR low <= (u * IZR unit) * (v * IZR unit) <= IZR high).
  { destruct B as [B1 B2]. split; [eapply Rle_trans; [|exact B1]|eapply Rle_trans; [exact B2|]].
    - repeat apply Rmin_glb; lra.
    - repeat apply Rmax_lub; lra. }
  replace (u * v * IZR unit) with ((u * IZR unit) * (v * IZR unit) / IZR unit) by (field; lra).
  split.
  - eapply Rle_trans; [now apply floor_le|]. apply Rmult_le_compat_r; [left; now apply Rinv_0_lt_compat|lra].
  - eapply Rle_trans; [|now apply ceiling_ge]. apply Rmult_le_compat_r; [left; now apply Rinv_0_lt_compat|lra].
Qed.

(* Scaled: a quotient by (r, s) with r > 0: p/s or p/r below, q/r or q/s above, as the signs of p and q say, rounded down and up. *)
Theorem scaled_quotient (unit : Z) (u v : R) (p q r s : Z) : (0 < unit)%Z -> (0 < r)%Z -> holds (IZR unit) (p, q) u -> holds (IZR unit) (r, s) v ->
  holds (IZR unit) (p * unit / (if Z.leb 0 p then s else r), - (- q * unit / (if Z.leb 0 q then r else s)))%Z (u / v).
Proof.
  intros P Pr U V. unfold holds in *; cbn in *. assert (Pu : 0 < IZR unit) by (apply (IZR_lt 0); trivial).
  assert (Pr' : 0 < IZR r) by (apply (IZR_lt 0); trivial). set (y := v * IZR unit) in *. set (x := u * IZR unit) in *.
  assert (Ps : (0 < s)%Z) by (apply lt_IZR; lra). assert (Ps' : 0 < IZR s) by lra. assert (Py : 0 < y) by lra.
  assert (Nv : v <> 0) by (intros ->; unfold y in Py; lra).
  replace (u / v * IZR unit) with (x * IZR unit / y) by (unfold x, y; field; repeat split; (exact Nv || lra)).
  assert (Ineq : forall a b c d, 0 < b -> 0 < d -> a * d <= c * b -> a / b <= c / d).
  { intros a b c d Hb Hd Hx. apply (Rmult_le_reg_r (b * d)); [nra|]. replace (a / b * (b * d)) with (a * d) by (field; lra).
    replace (c / d * (b * d)) with (c * b) by (field; lra). exact Hx. }
  split.
  - destruct (Z.leb_spec 0 p) as [L|L].
    + assert (0 <= IZR p) by (apply (IZR_le 0); trivial). eapply Rle_trans; [now apply floor_le|]. rewrite mult_IZR. apply Ineq; trivial.
      assert (IZR p * y <= x * IZR s) by nra. nra.
    + assert (IZR p < 0) by (apply (IZR_lt p 0); trivial). eapply Rle_trans; [now apply floor_le|]. rewrite mult_IZR. apply Ineq; trivial.
      assert (IZR p * y <= x * IZR r) by (destruct (Rle_dec 0 x); nra). nra.
  - replace (- q * unit)%Z with (- (q * unit))%Z by ring. destruct (Z.leb_spec 0 q) as [L|L].
    + assert (0 <= IZR q) by (apply (IZR_le 0); trivial). eapply Rle_trans; [|now apply ceiling_ge]. rewrite mult_IZR. apply Ineq; trivial.
      assert (x * IZR r <= IZR q * y) by (destruct (Rle_dec 0 x); nra). nra.
    + assert (IZR q < 0) by (apply (IZR_lt q 0); trivial). eapply Rle_trans; [|now apply ceiling_ge]. rewrite mult_IZR. apply Ineq; trivial.
      assert (x * IZR s <= IZR q * y) by nra. nra.
Qed.

(* Scaled: a root is the exact whole-number root, raised by one unit above. *)
Theorem scaled_root (unit : Z) (u : R) (p q : Z) : (0 < unit)%Z -> (0 <= p)%Z -> holds (IZR unit) (p, q) u ->
  holds (IZR unit) (Z.sqrt (p * unit), Z.sqrt (q * unit) + 1)%Z (sqrt u).
Proof.
  intros P Pp U. unfold holds in *; cbn in *. assert (Pu : 0 < IZR unit) by (apply (IZR_lt 0); trivial).
  assert (P0 : 0 <= IZR p) by (apply (IZR_le 0); trivial). assert (Hu : 0 <= u) by nra.
  assert (E : (sqrt u * IZR unit) * (sqrt u * IZR unit) = u * IZR unit * IZR unit).
  { rewrite <- (sqrt_sqrt u Hu) at 3. ring. }
  assert (S0 : 0 <= sqrt u * IZR unit) by (apply Rmult_le_pos; [apply sqrt_pos|lra]).
  assert (Hq : (0 <= q)%Z) by (apply le_IZR; lra).
  split.
  - assert (A := proj1 (Z.sqrt_spec (p * unit) ltac:(nia))). assert (N := Z.sqrt_nonneg (p * unit)).
    apply IZR_le in A. apply (IZR_le 0) in N. rewrite !mult_IZR in A. apply Rnot_lt_le. intro L. nra.
  - assert (A := proj2 (Z.sqrt_spec (q * unit) ltac:(nia))). assert (N := Z.sqrt_nonneg (q * unit)).
    apply IZR_lt in A. apply (IZR_le 0) in N. rewrite !mult_IZR in A. unfold Z.succ in A. apply Rnot_lt_le. intro L.
    rewrite !plus_IZR in *. nra.
Qed.

(** The terms of exp x, x = X/scale in [0, 1/16], each rounded down, in units of 1/unit; summed until one is 0. *)
Fixpoint exp_term (X scale unit : Z) (k : nat) : Z := match k with
  | O => unit
  | S j => (exp_term X scale unit j * X / scale / Z.of_nat (S j))%Z end.

Lemma derive_exp n x : Derive_n exp n x = exp x.
Proof.
  revert x; induction n as [|n IH]; intro x; [reflexivity|]. cbn. rewrite (Derive_ext _ exp) by exact IH.
  apply is_derive_unique, is_derive_Reals, derivable_pt_lim_exp.
Qed.

Lemma smooth_exp n x : ex_derive_n exp n x.
Proof.
  destruct n as [|n]; [exact I|]. cbn. apply (ex_derive_ext exp); [intro; symmetry; apply derive_exp|].
  exists (exp x). apply is_derive_Reals, derivable_pt_lim_exp.
Qed.

(* Series 1: with N terms computed, the last of them 0, exp x lies from their sum to 17N/16 units above it (N + ⌊N/8⌋ + 1 at most). *)
Theorem exp_series (X scale unit : Z) (N : nat) : (0 < unit)%Z -> (0 < scale)%Z -> (0 <= X)%Z -> (16 * X <= scale)%Z -> (0 < N)%nat ->
  exp_term X scale unit N = 0%Z ->
  let x := IZR X / IZR scale in let total := sum (S N) (fun k => IZR (exp_term X scale unit k)) in
  total <= exp x * IZR unit <= total + 17 * INR N / 16.
Proof.
  intros Pu Ps PX L HN Z0 x total.
  assert (Pu' : 0 < IZR unit) by (apply (IZR_lt 0); trivial). assert (Ps' : 0 < IZR scale) by (apply (IZR_lt 0); trivial).
  assert (Hx : 0 <= x <= / 16).
  { unfold x. apply IZR_le in L. rewrite mult_IZR in L. apply (IZR_le 0) in PX. split.
    - apply Rmult_le_pos; [exact PX|left; now apply Rinv_0_lt_compat].
    - apply (Rmult_le_reg_r (IZR scale)); trivial. unfold Rdiv. rewrite Rmult_assoc, Rinv_l by lra. lra. }
  set (t := fun k => IZR unit * x ^ k / INR (fact k)).
  assert (Ft : forall k, 0 < INR (fact k)) by (intro; apply INR_fact_lt_0).
  assert (Tp : forall k, 0 <= t k) by (intro k; unfold t; apply Rmult_le_pos; [apply Rmult_le_pos; [lra|apply pow_le; lra]|left; now apply Rinv_0_lt_compat]).
  assert (Tn : forall k, t (S k) = t k * x / INR (S k)).
  { intro k. unfold t. rewrite fact_simpl, mult_INR. cbn [pow]. field. split; [apply Rgt_not_eq, Ft|apply not_0_INR; lia]. }
  assert (Nn : forall k, (0 <= exp_term X scale unit k)%Z).
  { induction k as [|k IH]; [cbn; lia|]. cbn [exp_term]. apply Z.div_pos; [apply Z.div_pos; [nia|lia]|lia]. }
  (* what each term lost *)
  set (e := fun k => t k - IZR (exp_term X scale unit k)).
  assert (E : forall k, 0 <= e k /\ e (S k) < e k * x / INR (S k) + 1).
  { assert (Step : forall k, IZR (exp_term X scale unit (S k)) <= IZR (exp_term X scale unit k) * x / INR (S k) < IZR (exp_term X scale unit (S k)) + 1).
    { intro k. cbn [exp_term]. rewrite Z.div_div by lia. rewrite INR_IZR_INZ. set (m := Z.of_nat (S k)). assert (Pm : (0 < m)%Z) by (unfold m; lia).
      assert (Pm' : 0 < IZR m) by (apply (IZR_lt 0); trivial).
      replace (IZR (exp_term X scale unit k) * x / IZR m) with (IZR (exp_term X scale unit k * X) / IZR (scale * m)).
      - split; [apply floor_le; nia|apply floor_gt; nia].
      - rewrite !mult_IZR. unfold x. field. split; lra. }
    assert (E0 : forall k, 0 <= e k).
    { induction k as [|k IH]; [unfold e, t; cbn; lra|]. unfold e in *. rewrite Tn. destruct (Step k) as [S1 _].
      assert (Pk : 0 < INR (S k)) by (apply lt_0_INR; lia).
      assert (IZR (exp_term X scale unit k) * x / INR (S k) <= t k * x / INR (S k)); [|lra].
      apply Rmult_le_compat_r; [left; now apply Rinv_0_lt_compat|]. apply Rmult_le_compat_r; lra. }
    intro k. split; [apply E0|]. unfold e. rewrite Tn. destruct (Step k) as [_ S2].
    assert (Pk : 0 < INR (S k)) by (apply lt_0_INR; lia).
    replace ((t k - IZR (exp_term X scale unit k)) * x / INR (S k)) with (t k * x / INR (S k) - IZR (exp_term X scale unit k) * x / INR (S k)) by (field; lra). lra. }
  assert (E0 : e O = 0) by (unfold e, t; cbn; lra).
  assert (E1 : e 1%nat < 1) by (destruct (E O) as [_ H]; rewrite E0 in H; cbn in H; lra).
  assert (Small : forall k, e (S k) < 17 / 16).
  { intro k. destruct k as [|k]; [lra|]. induction k as [|k IH].
    - destruct (E 1%nat) as [P H]. cbn [INR] in H. nra.
    - destruct (E (S (S k))) as [P H]. assert (Pk : 2 <= INR (S (S (S k)))) by (apply (le_INR 2); lia).
      assert (e (S (S k)) * x / INR (S (S (S k))) <= / 16); [|lra].
      apply (Rmult_le_reg_r (INR (S (S (S k))))); [lra|]. unfold Rdiv. rewrite Rmult_assoc, Rinv_l, Rmult_1_r by lra. nra. }
  assert (Lost : forall n, (0 < n)%nat -> 0 <= sum (S n) e <= 17 * INR n / 16 - / 16).
  { induction n as [|n IH]; intro Hn; [lia|]. change (sum (S (S n)) e) with (sum (S n) e + e (S n)). assert (A := proj1 (E (S n))).
    destruct n as [|n].
    - cbn [sum]. rewrite E0. cbn [INR]. lra.
    - specialize (IH ltac:(lia)). assert (B := Small (S n)). rewrite (S_INR (S n)). lra. }
  assert (Sp : sum (S N) t = total + sum (S N) e).
  { unfold total. rewrite <- sum_plus. apply sum_ext. intros; unfold e; ring. }
  (* what follows the last term *)
  assert (Tail : 0 <= exp x * IZR unit - sum (S N) t <= t N / 30).
  { assert (Sf : sum (S N) t = IZR unit * sum_f_R0 (fun k => (x - 0) ^ k / INR (fact k) * Derive_n exp k 0) N).
    { clear -Ft. induction N as [|n IH].
      - cbn. unfold t. cbn. rewrite exp_0. field.
      - change (sum (S (S n)) t) with (sum (S n) t + t (S n)). rewrite IH. cbn [sum_f_R0]. rewrite derive_exp, exp_0, Rminus_0_r. unfold t. field. apply Rgt_not_eq, Ft. }
    destruct Hx as [[Hx|<-] Hx2].
    - destruct (Taylor_Lagrange exp N 0 x Hx (fun s _ k _ => smooth_exp k s)) as [z [Hz Ez]]. rewrite derive_exp, Rminus_0_r in Ez. rewrite Sf, Ez, Rminus_0_r.
      match goal with |- 0 <= (?a + ?r) * ?m - ?m * ?a <= _ => replace ((a + r) * m - m * a) with (r * m) by ring end.
      replace (x ^ S N / INR (fact (S N)) * exp z * IZR unit) with (t (S N) * exp z) by (unfold t; field; apply Rgt_not_eq, Ft).
      assert (Pz := exp_pos z). split; [apply Rmult_le_pos; [apply Tp|lra]|]. rewrite Tn.
      assert (Ez' : exp z <= 16 / 15).
      { assert (Q := exp_ineq1_le (- z)). assert (R0 : exp z * exp (- z) = 1) by (rewrite <- exp_plus, Rplus_opp_r; apply exp_0). nra. }
      assert (Pk : 2 <= INR (S N)) by (apply (le_INR 2); lia).
      assert (t N * x / INR (S N) <= t N / 32).
      { apply (Rmult_le_reg_r (INR (S N))); [lra|]. unfold Rdiv at 1. rewrite Rmult_assoc, Rinv_l, Rmult_1_r by lra. assert (Q := Tp N). nra. }
      assert (0 <= t N * x / INR (S N)).
      { apply Rmult_le_pos; [apply Rmult_le_pos; [apply Tp|lra]|left; apply Rinv_0_lt_compat; lra]. }
      assert (Q := Tp N). nra.
    - rewrite Sf. replace (sum_f_R0 _ N) with 1.
      + rewrite exp_0. assert (Q := Tp N). lra.
      + clear. induction N as [|n IH]; [cbn; rewrite exp_0; field|]. cbn [sum_f_R0]. rewrite <- IH, Rminus_0_r, pow_ne_zero by lia. unfold Rdiv. ring. }
  assert (TN : t N <= 17 / 16).
  { assert (e N = t N) by (unfold e; rewrite Z0; ring). destruct N as [|n]; [lia|]. assert (B := Small n). lra. }
  assert (B := Lost N HN). lra.
Qed.

(* Series 1, reciprocal: y <= E <= y + c in units, y at least 1 unit to 1: ⌊1/(y + c)⌋ is below 1/E, by less than c + 1 units. *)
Theorem reciprocal (unit y c : Z) (E : R) : (0 < unit)%Z -> (unit <= y)%Z -> (0 <= c)%Z -> IZR y <= E * IZR unit <= IZR (y + c) ->
  IZR (unit * unit / (y + c)) <= / E * IZR unit < IZR (unit * unit / (y + c)) + IZR c + 1.
Proof.
  intros P L Pc B. assert (Pu : 0 < IZR unit) by (apply (IZR_lt 0); trivial). assert (Pc' : 0 <= IZR c) by (apply (IZR_le 0); trivial).
  assert (Ly : IZR unit <= IZR y) by now apply IZR_le. assert (Pe : 1 <= E) by (apply (Rmult_le_reg_r (IZR unit)); lra).
  set (z := (y + c)%Z) in *. assert (Pz : (0 < z)%Z) by (unfold z; lia). assert (Pz' : 0 < IZR z) by (apply (IZR_lt 0); trivial).
  assert (Ez : IZR z = IZR y + IZR c) by apply plus_IZR.
  assert (F := floor_le (unit * unit) z Pz). assert (G := floor_gt (unit * unit) z Pz). rewrite mult_IZR in F, G.
  assert (Low : IZR unit * IZR unit / IZR z <= / E * IZR unit).
  { apply (Rmult_le_reg_r (IZR z * E)); [nra|]. replace (IZR unit * IZR unit / IZR z * (IZR z * E)) with (IZR unit * (E * IZR unit)) by (field; lra).
    replace (/ E * IZR unit * (IZR z * E)) with (IZR unit * IZR z) by (field; lra). apply Rmult_le_compat_l; lra. }
  assert (High : / E * IZR unit - IZR unit * IZR unit / IZR z <= IZR c).
  { apply (Rmult_le_reg_r (IZR z * E)); [nra|]. replace ((/ E * IZR unit - IZR unit * IZR unit / IZR z) * (IZR z * E)) with (IZR unit * (IZR z - E * IZR unit)) by (field; lra).
    assert (IZR unit * (IZR z - E * IZR unit) <= IZR unit * IZR c) by (apply Rmult_le_compat_l; lra).
    assert (IZR unit * 1 <= IZR z * E) by (apply Rmult_le_compat; lra). nra. }
  lra.
Qed.

(* Series 1, squaring: from 0 <= E − Y < c M, M = max(1, E), in units: 0 <= E² − ⌊Y²⌋ < (2c + 1) max(1, E²). *)
Theorem squaring (unit Y : Z) (E c : R) : (0 < unit)%Z -> (0 <= Y)%Z -> 0 <= E * IZR unit - IZR Y < c * Rmax 1 E ->
  0 <= E * E * IZR unit - IZR (Y * Y / unit) < (2 * c + 1) * Rmax 1 (E * E).
Proof.
  intros P PY B. assert (Pu : 0 < IZR unit) by (apply (IZR_lt 0); trivial). assert (PY' : 0 <= IZR Y) by (apply (IZR_le 0); trivial).
  assert (F := floor_le (Y * Y) unit P). assert (G := floor_gt (Y * Y) unit P). rewrite mult_IZR in F, G.
  assert (Pe : 0 <= E) by (apply (Rmult_le_reg_r (IZR unit)); lra).
  set (y := IZR Y / IZR unit) in *. assert (Ey : IZR Y = y * IZR unit) by (unfold y; field; lra).
  assert (Sq : IZR Y * IZR Y / IZR unit = y * y * IZR unit) by (rewrite Ey; field; lra). rewrite Sq in F, G. rewrite Ey in B.
  assert (Py : 0 <= y) by (unfold y; apply Rmult_le_pos; [trivial|left; now apply Rinv_0_lt_compat]).
  assert (Yle : y <= E) by (apply (Rmult_le_reg_r (IZR unit)); lra).
  assert (D : E * E * IZR unit - y * y * IZR unit = (E * IZR unit - y * IZR unit) * (E + y)) by ring.
  assert (M1 : Rmax 1 E * E <= Rmax 1 (E * E)) by (unfold Rmax; destruct (Rle_dec 1 E), (Rle_dec 1 (E * E)); nra).
  assert (M2 : 1 <= Rmax 1 (E * E)) by apply Rmax_l.
  assert (Hc : 0 <= c).
  { apply Rnot_lt_le. intro N. assert (1 <= Rmax 1 E) by apply Rmax_l. nra. }
  set (loss := E * IZR unit - y * IZR unit) in *.
  assert (B2 : loss * (E + y) <= c * Rmax 1 E * (2 * E)) by (apply Rmult_le_compat; lra).
  assert (B3 : c * Rmax 1 E * (2 * E) <= 2 * c * Rmax 1 (E * E)).
  { replace (c * Rmax 1 E * (2 * E)) with (2 * c * (Rmax 1 E * E)) by ring. apply Rmult_le_compat_l; lra. }
  assert (B4 : 0 <= loss * (E + y)) by (apply Rmult_le_pos; lra). split; [lra|]. nra.
Qed.

(** The terms of cos x (a = 0) and sin x (a = 1), x = r/unit in [0, 4/5], each rounded down, in units; the square of r rounded down too. *)
Fixpoint wave_term (a : nat) (r unit : Z) (k : nat) : Z := match k with
  | O => match a with O => unit | _ => r end
  | S j => (wave_term a r unit j * (r * r / unit) / unit / Z.of_nat ((2 * j + 1 + a) * (2 * j + 2 + a)))%Z end.

Definition alternate (k : nat) : R := if Nat.even k then 1 else -1.

Lemma alternate_pow k : (-1) ^ k = alternate k.
Proof.
  unfold alternate. induction k as [|k IH]; [reflexivity|]. cbn [pow]. rewrite IH, Nat.even_succ, <- Nat.negb_even.
  destruct (Nat.even k); cbn; ring.
Qed.

(** Of alternating magnitudes below c half add up. *)
Lemma alternating_losses (e : nat -> R) (c : R) (n : nat) : (forall k, 0 <= e k <= c) -> e O = 0 ->
  - (INR n * c) <= sum (S (2 * n)) (fun k => alternate k * e k) <= INR n * c.
Proof.
  intros B Z. induction n as [|n IH]; [cbn; rewrite Z; lra|].
  replace (S (2 * S n)) with (S (S (S (2 * n)))) by lia. cbn [sum]. rewrite S_INR.
  assert (E1 : alternate (S (2 * n)) = -1) by (unfold alternate; rewrite Nat.even_succ, <- Nat.negb_even, Nat.even_mul; reflexivity).
  assert (E2 : alternate (S (S (2 * n))) = 1) by (unfold alternate; cbn [Nat.even]; rewrite Nat.even_mul; reflexivity).
  rewrite E1, E2. assert (B1 := B (S (2 * n))). assert (B2 := B (S (S (2 * n)))). cbn [sum] in IH. lra.
Qed.

(** Partial sums of sine and cosine in the standard library: those with an even number of further terms are above, those with one more below. *)
Lemma wave_bounds (a : nat) (x : R) (n : nat) : (a <= 1)%nat -> 0 <= x <= 4 / 5 -> (0 < n)%nat ->
  let f := match a with O => cos x | _ => sin x end in
  let part m := sum (S m) (fun k => alternate k * (x ^ (2 * k + a) / INR (fact (2 * k + a)))) in
  part (2 * n + 1)%nat <= f <= part (2 * n)%nat.
Proof.
  intros Ha Hx Hn f part.
  assert (Sf : forall g m, sum_f_R0 g m = sum (S m) g).
  { intros g m. induction m as [|m IH]; [cbn; ring|]. cbn [sum_f_R0]. rewrite IH. reflexivity. }
  assert (Ext : forall m, part m = match a with O => cos_approx x m | _ => sin_approx x m end).
  { intro m. unfold part. destruct a as [|[|a]]; [| |lia]; unfold cos_approx, sin_approx; rewrite Sf; apply sum_ext; intros k _;
      unfold cos_term, sin_term; rewrite alternate_pow; [rewrite Nat.add_0_r|]; reflexivity. }
  destruct n as [|n]; [lia|]. rewrite !Ext. unfold f. destruct a as [|[|a]]; [| |lia].
  - assert (C := pre_cos_bound x n ltac:(lra) ltac:(lra)). assert (C' := pre_cos_bound x (S n) ltac:(lra) ltac:(lra)). replace (2 * (n + 1))%nat with (2 * S n)%nat in C by lia. lra.
  - assert (C := pre_sin_bound x n ltac:(lra) ltac:(lra)). assert (C' := pre_sin_bound x (S n) ltac:(lra) ltac:(lra)). replace (2 * (n + 1))%nat with (2 * S n)%nat in C by lia. lra.
Qed.

(* Series 2: with N = 2n terms computed after the first, the last of them 0, sin x and cos x lie within 3N/4 + 3/2 units of the alternating sum. *)
Theorem wave_series (a : nat) (r unit : Z) (n : nat) : (a <= 1)%nat -> (0 < unit)%Z -> (0 <= r)%Z -> (5 * r <= 4 * unit)%Z -> (0 < n)%nat ->
  wave_term a r unit (2 * n) = 0%Z ->
  let x := IZR r / IZR unit in let total := sum (S (2 * n)) (fun k => alternate k * IZR (wave_term a r unit k)) in
  Rabs (match a with O => cos x | _ => sin x end * IZR unit - total) <= 3 * INR (2 * n) / 4 + 3 / 2.
Proof.
  intros Ha Pu Pr L Hn Z0 x total.
  assert (Pu' : 0 < IZR unit) by (apply (IZR_lt 0); trivial).
  assert (Hx : 0 <= x <= 4 / 5).
  { unfold x. apply IZR_le in L. rewrite !mult_IZR in L. apply (IZR_le 0) in Pr. split.
    - apply Rmult_le_pos; [exact Pr|left; now apply Rinv_0_lt_compat].
    - apply (Rmult_le_reg_r (IZR unit)); trivial. unfold Rdiv at 1. rewrite Rmult_assoc, Rinv_l by lra. lra. }
  set (t := fun k => IZR unit * (x ^ (2 * k + a) / INR (fact (2 * k + a)))).
  assert (Ft : forall k, 1 <= INR (fact k)) by (intro k; apply (le_INR 1), lt_O_fact).
  assert (Px : forall k, 0 <= x ^ k <= 1).
  { intro k. split; [apply pow_le; lra|]. assert (Q := pow_incr x 1 k ltac:(lra)). now rewrite pow1 in Q. }
  assert (Tp : forall k, 0 <= t k <= IZR unit).
  { intro k. unfold t. specialize (Px (2 * k + a)%nat). specialize (Ft (2 * k + a)%nat).
    assert (0 <= x ^ (2 * k + a) / INR (fact (2 * k + a)) <= 1).
    { split; [apply Rmult_le_pos; [lra|left; apply Rinv_0_lt_compat; lra]|].
      apply (Rmult_le_reg_r (INR (fact (2 * k + a)))); [lra|]. unfold Rdiv. rewrite Rmult_assoc, Rinv_l by lra. lra. }
    nra. }
  set (c := fun k => INR ((2 * k + 1 + a) * (2 * k + 2 + a))).
  assert (Hc : forall k, 2 <= c k) by (intro k; unfold c; apply (le_INR 2); nia).
  assert (Hc' : forall k, 12 <= c (S k)) by (intro k; unfold c; replace 12 with (INR 12) by (cbn; ring); apply le_INR; nia).
  assert (Tn : forall k, t (S k) = t k * (x * x) / c k).
  { intro k. unfold t, c. replace (2 * S k + a)%nat with (S (S (2 * k + a))) by lia. rewrite !fact_simpl, !mult_INR.
    replace (2 * k + 1 + a)%nat with (S (2 * k + a)) by lia. replace (2 * k + 2 + a)%nat with (S (S (2 * k + a))) by lia. cbn [pow].
    specialize (Ft (2 * k + a)%nat). field. repeat split; try (apply not_0_INR; lia); lra. }
  assert (Sq0 : (0 <= r * r / unit)%Z) by (apply Z.div_pos; nia).
  assert (Sq : 0 <= IZR unit * (x * x) - IZR (r * r / unit) < 1).
  { assert (F := floor_le (r * r) unit Pu). assert (G := floor_gt (r * r) unit Pu). rewrite mult_IZR in F, G.
    replace (IZR unit * (x * x)) with (IZR r * IZR r / IZR unit) by (unfold x; field; lra). lra. }
  assert (Nn : forall k, (0 <= wave_term a r unit k)%Z).
  { induction k as [|k IH]; [cbn; destruct a; lia|]. cbn [wave_term]. apply Z.div_pos; [apply Z.div_pos; [nia|lia]|nia]. }
  set (e := fun k => t k - IZR (wave_term a r unit k)).
  assert (Step : forall k, IZR (wave_term a r unit (S k)) <= IZR (wave_term a r unit k) * (IZR (r * r / unit) / IZR unit) / c k < IZR (wave_term a r unit (S k)) + 1).
  { intro k. cbn [wave_term]. rewrite Z.div_div by nia. unfold c. rewrite INR_IZR_INZ. set (m := Z.of_nat ((2 * k + 1 + a) * (2 * k + 2 + a))).
    assert (Pm : (0 < m)%Z) by (unfold m; nia). assert (Pm' : 0 < IZR m) by (apply (IZR_lt 0); trivial).
    replace (IZR (wave_term a r unit k) * (IZR (r * r / unit) / IZR unit) / IZR m) with (IZR (wave_term a r unit k * (r * r / unit)) / IZR (unit * m)).
    - split; [apply floor_le; nia|apply floor_gt; nia].
    - rewrite !mult_IZR. field. split; lra. }
  assert (E0 : e O = 0).
  { unfold e, t. destruct a as [|[|a]]; [| |lia]; cbn; unfold x; field; lra. }
  assert (Ek : forall k, 0 <= e k -> 0 <= e (S k) < (e k * (x * x) + 1) / c k + 1).
  { intros k P. destruct (Step k) as [S1 S2]. specialize (Hc k). assert (Pc : 0 < c k) by lra. assert (Ic : 0 < / c k) by now apply Rinv_0_lt_compat.
    assert (T0 : 0 <= IZR (wave_term a r unit k)) by (apply (IZR_le 0), Nn). assert (T1 := Tp k).
    set (T := IZR (wave_term a r unit k)) in *. set (s := IZR (r * r / unit) / IZR unit) in *.
    assert (Hs : 0 <= x * x - s /\ (x * x - s) * IZR unit < 1).
    { assert (Es : (x * x - s) * IZR unit = IZR unit * (x * x) - IZR (r * r / unit)) by (unfold s; field; lra).
      split; [apply (Rmult_le_reg_r (IZR unit)); trivial; lra|lra]. }
    assert (Hs0 : 0 <= s) by (unfold s; apply Rmult_le_pos; [now apply (IZR_le 0)|left; now apply Rinv_0_lt_compat]).
    change (e (S k)) with (t (S k) - IZR (wave_term a r unit (S k))). rewrite Tn. assert (Et : e k = t k - T) by reflexivity.
    assert (A : 0 <= t k * (x * x) - T * s <= e k * (x * x) + 1).
    { rewrite Et in *. assert (T * (x * x - s) <= IZR unit * (x * x - s)) by (apply Rmult_le_compat_r; lra). split; [nra|nra]. }
    assert (D : t k * (x * x) / c k - T * s / c k = (t k * (x * x) - T * s) / c k) by (field; lra).
    assert (B1 : 0 <= (t k * (x * x) - T * s) / c k) by (apply Rmult_le_pos; lra).
    assert (B2 : (t k * (x * x) - T * s) / c k <= (e k * (x * x) + 1) / c k) by (apply Rmult_le_compat_r; lra). lra. }
  assert (Small : forall k, 0 <= e k <= 3 / 2).
  { assert (Two : 0 <= e 1%nat <= 3 / 2).
    { destruct (Ek O ltac:(lra)) as [P H]. split; [exact P|]. rewrite E0 in H. specialize (Hc O).
      assert ((0 * (x * x) + 1) / c O <= / 2); [|lra]. rewrite Rmult_0_l, Rplus_0_l. unfold Rdiv. rewrite Rmult_1_l. apply Rinv_le_contravar; lra. }
    intro k. destruct k as [|k]; [lra|]. induction k as [|k IH]; [exact Two|].
    destruct (Ek (S k) (proj1 IH)) as [P H]. split; [exact P|]. specialize (Hc' k).
    assert ((e (S k) * (x * x) + 1) / c (S k) <= / 2); [|lra].
    apply (Rmult_le_reg_r (c (S k))); [lra|]. unfold Rdiv. rewrite Rmult_assoc, Rinv_l, Rmult_1_r by lra.
    assert (x * x <= 16 / 25) by nra. nra. }
  assert (Al := alternating_losses e (3 / 2) n Small E0).
  assert (Wb := wave_bounds a x n Ha Hx Hn). cbv zeta in Wb.
  set (f := match a with O => cos x | _ => sin x end) in *.
  assert (Pt : forall m, IZR unit * sum (S m) (fun k => alternate k * (x ^ (2 * k + a) / INR (fact (2 * k + a)))) = sum (S m) (fun k => alternate k * t k)).
  { intro m. rewrite <- sum_scale. apply sum_ext. intros; unfold t; ring. }
  assert (Up : f * IZR unit <= sum (S (2 * n)) (fun k => alternate k * t k)).
  { rewrite <- Pt, Rmult_comm. apply Rmult_le_compat_l; lra. }
  assert (Dn : sum (S (2 * n)) (fun k => alternate k * t k) - t (S (2 * n)) <= f * IZR unit).
  { replace (sum (S (2 * n)) (fun k => alternate k * t k) - t (S (2 * n))) with (sum (S (2 * n + 1)) (fun k => alternate k * t k)).
    - rewrite <- Pt, Rmult_comm. apply Rmult_le_compat_r; lra.
    - replace (2 * n + 1)%nat with (S (2 * n)) by lia. change (sum (S (S (2 * n))) (fun k => alternate k * t k)) with (sum (S (2 * n)) (fun k => alternate k * t k) + alternate (S (2 * n)) * t (S (2 * n))).
      assert (E1 : alternate (S (2 * n)) = -1) by (unfold alternate; rewrite Nat.even_succ, <- Nat.negb_even, Nat.even_mul; reflexivity). rewrite E1. ring. }
  assert (Tl : t (S (2 * n)) <= 3 / 2).
  { assert (e (2 * n)%nat = t (2 * n)%nat) by (unfold e; rewrite Z0; ring). assert (B := Small (2 * n)%nat). rewrite Tn. specialize (Hc (2 * n)%nat).
    apply (Rmult_le_reg_r (c (2 * n)%nat)); [lra|]. unfold Rdiv. rewrite Rmult_assoc, Rinv_l, Rmult_1_r by lra. assert (x * x <= 16 / 25) by nra. nra. }
  assert (Sp : sum (S (2 * n)) (fun k => alternate k * t k) = total + sum (S (2 * n)) (fun k => alternate k * e k)).
  { unfold total. rewrite <- sum_plus. apply sum_ext. intros; unfold e; ring. }
  replace (INR (2 * n)) with (2 * INR n) by (rewrite mult_INR; cbn; ring).
  apply Rabs_le. lra.
Qed.
