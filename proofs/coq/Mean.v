(** Mean value theorem for functions that are smooth but for finitely many points (proofs/slope.md, proofs/forms.md (7)). *)
Require Import Reals Lra List.
From Coquelicot Require Import Coquelicot.
Import ListNotations.
Open Scope R_scope.

(** Continuous on a set, seen from within it. *)
Definition continuous_over (s : R -> Prop) (f : R -> R) : Prop :=
  forall x, s x -> forall eps, 0 < eps -> exists delta, 0 < delta /\
    forall y, s y -> Rabs (y - x) < delta -> Rabs (f y - f x) < eps.

Definition between (a b : R) : R -> Prop := fun x => a <= x <= b.

(** At every point inside [a, b] but those listed f has a derivative, one that is in [slopes]. *)
Definition smooth_on (a b : R) (cuts : list R) (f : R -> R) (slopes : R -> Prop) : Prop :=
  forall x, a < x < b -> ~ In x cuts -> exists d, is_derive f x d /\ slopes d.

Lemma continuous_sub (s s' : R -> Prop) f : (forall x, s' x -> s x) -> continuous_over s f -> continuous_over s' f.
Proof.
  intros I C x Hx eps He. destruct (C x (I x Hx) eps He) as [delta [Hd D]].
  exists delta; split; trivial. intros y Hy. apply D. now apply I.
Qed.

Definition clip (a b x : R) : R := Rmax a (Rmin b x).

Lemma clip_between a b x : a <= b -> between a b (clip a b x).
Proof. intro H. unfold between, clip, Rmax, Rmin. destruct (Rle_dec b x), (Rle_dec a _); lra. Qed.

Lemma clip_same a b x : between a b x -> clip a b x = x.
Proof. intros [H H']. unfold clip, Rmax, Rmin. destruct (Rle_dec b x), (Rle_dec a _); lra. Qed.

Lemma clip_near a b x y : Rabs (clip a b y - clip a b x) <= Rabs (y - x).
Proof.
  unfold clip, Rmax, Rmin, Rabs.
  destruct (Rle_dec b x), (Rle_dec b y); repeat destruct (Rle_dec a _); repeat destruct Rcase_abs; lra.
Qed.

Lemma continuous_clip f a b : a <= b -> continuous_over (between a b) f -> forall x, continuity_pt (fun y => f (clip a b y)) x.
Proof.
  intros L C x eps He. destruct (C _ (clip_between a b x L) eps He) as [delta [Hd D]].
  exists delta; split; [exact Hd|]. intros y [_ Hy]. apply D; [now apply clip_between|].
  eapply Rle_lt_trans; [apply clip_near|exact Hy].
Qed.

Lemma clip_derive (f : R -> R) a b x (d : R) : a < x < b -> is_derive f x d -> is_derive (fun y => f (clip a b y)) x d.
Proof.
  intros Hx D. apply (is_derive_ext_loc f); [|exact D].
  assert (Hm : 0 < Rmin (x - a) (b - x)) by (apply Rmin_glb_lt; lra).
  exists (mkposreal _ Hm). intros y Hy. cbn in Hy.
  assert (H3 := Rmin_l (x - a) (b - x)). assert (H4 := Rmin_r (x - a) (b - x)).
  unfold ball in Hy; cbn in Hy; unfold AbsRing_ball, abs, minus, plus, opp in Hy; cbn in Hy.
  apply Rabs_def2 in Hy. rewrite clip_same; [reflexivity|unfold between; lra].
Qed.

Lemma mean_smooth (f : R -> R) a b (slopes : R -> Prop) : a < b -> continuous_over (between a b) f -> smooth_on a b [] f slopes ->
  exists d, slopes d /\ f b - f a = d * (b - a).
Proof.
  intros L C D. set (g := fun x => f (clip a b x)).
  assert (pr : forall x, a < x < b -> derivable_pt g x).
  { intros x Hx. apply ex_derive_Reals_0. destruct (D x Hx (@in_nil _ x)) as [d [Hd _]].
    exists d. now apply clip_derive. }
  destruct (MVT g id a b pr (fun c _ => derivable_pt_id c) L (fun c _ => continuous_clip f a b (Rlt_le _ _ L) C c)
    (fun c _ => derivable_continuous_pt _ _ (derivable_pt_id c))) as [c [P E]].
  destruct (D c P (@in_nil _ c)) as [d [Hd Sd]]. exists d; split; trivial.
  assert (Q : derive_pt g c (pr c P) = d).
  { rewrite Derive_Reals. apply is_derive_unique. now apply clip_derive. }
  rewrite Q, derive_pt_id in E. unfold id, g in E. rewrite !clip_same in E by (unfold between; lra). lra.
Qed.

(* A function that is continuous, and smooth but for finitely many points, rises at least as its least slope says. *)
Lemma mean_below (f : R -> R) a b cuts lo : a <= b -> continuous_over (between a b) f ->
  smooth_on a b cuts f (fun d => lo <= d) -> lo * (b - a) <= f b - f a.
Proof.
  revert a b; induction cuts as [|p cuts IH]; intros a b L C D.
  - destruct L as [L|<-]; [|lra]. destruct (mean_smooth f a b _ L C D) as [d [H ->]]. apply Rmult_le_compat_r; lra.
  - assert (D' : forall a' b', a <= a' -> b' <= b -> (p <= a' \/ b' <= p) -> smooth_on a' b' cuts f (fun d => lo <= d)).
    { intros a' b' Ha Hb Hp x Hx N. apply D; [lra|]. intros [<-|I]; [lra|now apply N]. }
    destruct (Rle_dec p a) as [Hp|Hp]; [apply IH; trivial; apply D'; lra|].
    destruct (Rle_dec b p) as [Hq|Hq]; [apply IH; trivial; apply D'; lra|].
    assert (A := IH a p ltac:(lra) ltac:(apply (continuous_sub (between a b)); unfold between; trivial; intros; lra)
      ltac:(apply D'; lra)).
    assert (B := IH p b ltac:(lra) ltac:(apply (continuous_sub (between a b)); unfold between; trivial; intros; lra)
      ltac:(apply D'; lra)). lra.
Qed.

Lemma continuous_opposite (s : R -> Prop) (f : R -> R) : continuous_over s f -> continuous_over s (fun t => - f t).
Proof.
  intros C x Hx eps He. destruct (C x Hx eps He) as [d [Hd D]]. exists d. split; trivial. intros y Hy Hyx.
  specialize (D y Hy Hyx). replace (- f y - - f x) with (- (f y - f x)) by ring. now rewrite Rabs_Ropp.
Qed.

(* A function that is continuous, and smooth but for finitely many points, moves no more than its slopes allow. *)
Lemma mean_value (f : R -> R) a b cuts lo hi : a <= b -> continuous_over (between a b) f ->
  smooth_on a b cuts f (fun d => lo <= d <= hi) -> lo * (b - a) <= f b - f a <= hi * (b - a).
Proof.
  intros L C D. split.
  - apply (mean_below f a b cuts); trivial. intros x Hx N. destruct (D x Hx N) as [d [Hd B]]. exists d. split; [exact Hd|lra].
  - assert (- hi * (b - a) <= - f b - - f a); [|lra].
    apply (mean_below (fun t => - f t) a b cuts); [exact L|now apply continuous_opposite|].
    intros x Hx N. destruct (D x Hx N) as [d [Hd B]]. exists (- d). split; [now apply (is_derive_opp (V := R_NormedModule) f)|lra].
Qed.

Lemma mean_size (f : R -> R) a b cuts k : continuous_over (between (Rmin a b) (Rmax a b)) f ->
  smooth_on (Rmin a b) (Rmax a b) cuts f (fun d => Rabs d <= k) -> Rabs (f b - f a) <= k * Rabs (b - a).
Proof.
  intros C D.
  assert (M := mean_value f (Rmin a b) (Rmax a b) cuts (- k) k (Rle_trans _ _ _ (Rmin_l a b) (Rmax_l a b)) C).
  assert (D' : smooth_on (Rmin a b) (Rmax a b) cuts f (fun d => - k <= d <= k)).
  { intros x Hx N. destruct (D x Hx N) as [d [Hd Sd]]. exists d; split; trivial.
    apply Rabs_le_between in Sd. exact Sd. }
  specialize (M D'). unfold Rmin, Rmax in M. apply Rabs_le_between. destruct (Rle_dec a b).
  - rewrite (Rabs_pos_eq (b - a)) by lra. lra.
  - rewrite (Rabs_left (b - a)) by lra. lra.
Qed.
