"""The report, the supplement and the notebook's display: what is in them, that nothing in them acts, the same bytes."""

from __future__ import annotations

import json
import os
import pickle
import re
import subprocess
import sys
import zipfile
from dataclasses import replace
from fractions import Fraction
from html.parser import HTMLParser
from io import BytesIO
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from tests.conftest import installed, proved
from ultibound.certificate.certificate import Certificate
from ultibound.checker import check
from ultibound.checker.document import digest
from ultibound.checker.rules import SHAPES
from ultibound.report import figures
from ultibound.report.accepted import Accepted, NotAccepted, accepted, accepted_here
from ultibound.report.bundle import bundle, claim_name
from ultibound.report.curves import envelope, gain_curve, over_gain, plane
from ultibound.report.document import Document
from ultibound.report.html import STYLE, html
from ultibound.report.inert import fenced, tex, visible
from ultibound.report.inert import markdown as escaped
from ultibound.report.intervals import gain_intervals
from ultibound.report.latex import latex
from ultibound.report.margins import exact, judged, rounded
from ultibound.report.markdown import markdown
from ultibound.report.outlines import PAGES
from ultibound.report.plain import plain
from ultibound.report.reporting import report
from ultibound.report.standards import NEITHER, STANDARDS
from ultibound.report.statement import explained
from ultibound.report.walks import point_maps, walked

EXAMPLES = Path(__file__).parents[2] / "ultibound" / "examples"
LONG = bool(os.environ.get("ULTIBOUND_LONG"))
COMMAND = [sys.executable, "-c", "from ultibound.cli import main; main()"]
HOSTILE = (
    "<script>alert(1)</script>\\u202e\\u001b[2J\\\\input{/etc/passwd}$x^2$ `a` [b](http://example.org) & |c| %d #e ~f"
)
EVIL = HOSTILE.encode().decode("unicode_escape")


@pytest.fixture(scope="module")
def pendulum() -> Accepted:
    return accepted_here(proved((EXAMPLES / "pendulum.toml").read_text()))


@pytest.fixture(scope="module")
def document(pendulum: Accepted) -> Document:
    return report(pendulum)


@pytest.fixture(scope="module")
def hostile() -> Accepted:
    text = f"""format = 1
title = "{HOSTILE}"
notes = "{HOSTILE}"
[state]
v = {{ range = [-1, 1], unit = "{HOSTILE}" }}
[uncertain]
d = {{ range = [-0.01, 0.01], unit = "{HOSTILE}" }}
[library]
file = "<b>&$x.csv"
at = {{ speed = "v" }}
[next]
v = "kept + d"
[target]
v = 0
[[require]]
that = "bound(v) <= 0.05"
[[require]]
that = "sensitivity(v, d) >= 0.5"
"""
    data = {"<b>&$x.csv": "speed,kept\n-1,-0.4\n0,0\n1,0.4\n"}
    return accepted_here(proved(text, data=data))


class Page(HTMLParser):
    """Elements, attributes, text; complains where tags do not match."""

    VOID = ("meta", "link", "br")

    def __init__(self, page: bytes) -> None:
        super().__init__()
        self.open: list[str] = []
        self.met: list[tuple[str, dict[str, str | None]]] = []
        self.texts: list[str] = []
        self.feed(page.decode())
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.met.append((tag, dict(attrs)))
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.texts.append(data)

    @property
    def text(self) -> str:
        return " ".join("".join(self.texts).split())


def test_the_page_stands_alone(document: Document) -> None:
    page = Page(html(document))
    assert not page.open
    tags = {t for t, _ in page.met}
    assert {"math", "svg", "table", "details", "summary", "figure"} <= tags
    assert not tags & {"script", "iframe", "img", "object", "embed", "form", "base", "foreignobject", "use_"}
    policy = next(a["content"] for t, a in page.met if a.get("http-equiv") == "Content-Security-Policy")
    assert policy is not None and policy.startswith("default-src 'none'")
    for tag, attributes in page.met:
        assert not any(k.startswith("on") for k in attributes), (tag, attributes)
        for key in ("href", "src", "action", "style"):
            found = attributes.get(key) or ""
            assert "//" not in found and "url(" not in found.replace("url(#", ""), (tag, found)
            assert key != "href" or not found or found.startswith(("#", "data:,"))
    assert "://" not in html(document).decode().replace("http://www.w3.org/", "")
    assert all(a.get("alttext") for t, a in page.met if t == "math")
    assert all(a.get("aria-label") for t, a in page.met if t == "svg" and "aria-label" in a) and sum(
        t == "svg" and "aria-label" in a for t, a in page.met
    ) == sum(t == "figure" for t, _ in page.met)


def test_everyone_finds_their_part(document: Document, pendulum: Accepted) -> None:
    text = Page(html(document)).text
    for part in ("For the designer", "For the researcher", "For the reviewer", "The proof, line by line".lower()):
        assert part.lower() in text.lower()
    assert pendulum.digest in text and "python3 -I -S check_certificate.pyz" in text and NEITHER in text
    assert all(title in text and name in text for name, title, _ in STANDARDS)
    for form in (latex(document).decode(), markdown(document).decode()):
        assert (
            all(re.split("[-:]", name)[0] in form for name, _, _ in STANDARDS) and "neither a risk assessment" in form
        )
    for number, line in enumerate(pendulum.proof, 1):
        assert f"{number}. {line['proves']}:" in text


def test_every_rule_is_said_in_words() -> None:
    assert set(SHAPES) == set(PAGES)  # that the pages are there, tests/test_proofs.py holds


def test_the_standards_are_those_named() -> None:
    assert {n for n, _, _ in STANDARDS} == {
        "ISO 12100:2010",
        "ISO 10218-1:2025",
        "ISO 10218-2:2025",
        "ISO 13482:2014",
        "ISO 25785-1",
        "ISO 13849-1:2023",
    }


def test_the_outline_is_reached_by_keyboard(document: Document) -> None:
    """details and summary are, by themselves; so is everything that scrolls, and where the keyboard is can be seen."""
    page = Page(html(document))
    groups = [k for k, (t, _) in enumerate(page.met) if t == "details"]
    assert len(groups) > 20 and all(page.met[k + 1][0] == "summary" for k in groups)
    assert all("tabindex" not in page.met[k][1] and "tabindex" not in page.met[k + 1][1] for k in groups)
    assert all(a.get("tabindex") == "0" for t, a in page.met if t == "pre" or (a.get("class") or "").startswith("wide"))
    assert "summary:focus-visible" in STYLE and "outline: 3px" in STYLE
    names = {a["id"] for t, a in page.met if t == "h2"}
    assert {a["href"] for t, a in page.met if t == "a"} == {f"#{n}" for n in names}


def luminance(colour: str) -> float:
    parts = [int(colour[k : k + 2], 16) / 255 for k in (1, 3, 5)]
    linear = [x / 12.92 if x <= 0.04045 else ((x + 0.055) / 1.055) ** 2.4 for x in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(a: str, b: str) -> float:
    high, low = sorted((luminance(a), luminance(b)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def test_contrast() -> None:
    """Every colour of letters against every ground it stands on: at least 4.5."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21) and contrast("#777777", "#ffffff") < 4.5
    colours = dict(re.findall(r"--(\w+): (#[0-9a-f]{6})", STYLE))
    used = set(re.findall(r"[{;\s]color: ([^;]+);", STYLE))
    letters = {re.sub(r"var\(--(\w+)\)", r"\1", x) for x in used}
    assert letters <= set(colours), letters
    for name in letters:
        for ground in (colours["paper"], colours["tint"], "#ffffff"):
            assert contrast(colours[name], ground) >= 4.5, (name, ground)
    for colour in (figures.INK, figures.QUIET):
        assert (contrast(colour, "#ffffff") >= 4.5 and contrast(colour, figures.FILL) >= 4.5) or colour == figures.QUIET


def test_figures_are_labelled_with_units_and_hold_no_date(document: Document) -> None:
    page = html(document).decode()
    assert "distance from the target ρ (m/s)" in page and "step n (1)" in page and "error (m/s)" in page
    assert "<dc:date" not in page and "matplotlib" not in page and "<!DOCTYPE svg" not in page
    ids = [a["id"] for _, a in Page(html(document)).met if "id" in a]
    assert len(set(ids)) == len(ids)
    referred = set(re.findall(r'(?:href="|url\()#(f[0-9a-f]{8}-[\w.-]+)', page))
    assert len(referred) > 5 and referred <= set(ids)
    drawn = [a.get("style") or "" for t, a in Page(html(document)).met if t == "path"]
    colours = {c for s in drawn for c in re.findall(r"(?:fill|stroke): (#[^;]*)", s)}
    assert "#ffffff" in colours and all(re.fullmatch("#[0-9a-f]{6}", c) for c in colours)


def test_figures_on_an_axis_that_is_given(pendulum: Accepted) -> None:
    from matplotlib.figure import Figure

    ax = Figure().add_subplot()
    maps = point_maps(pendulum)
    curve = gain_curve(pendulum, maps[0])
    assert curve is not None and figures.gain_curve(curve, ax=ax) is ax and len(ax.lines) >= 3
    assert figures.gain_curve(curve) is not ax
    styles = {(x.get_linestyle(), x.get_marker()) for x in ax.lines}
    assert len(styles) >= len(ax.lines) - 1  # told apart without colour


def test_without_matplotlib_a_report_says_how_to_get_figures(
    pendulum: Accepted, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(figures, "available", lambda: False)
    page = Page(html(report(pendulum)))
    assert "pip install matplotlib" in page.text and "figure" not in {t for t, _ in page.met}
    assert "worst error" in page.text


# --- estimates lie within what is proved, and are not far from it ------------------------------------------------------


def test_simulated_runs_stay_inside_the_proved_envelope(pendulum: Accepted) -> None:
    walks = walked(pendulum, point_maps(pendulum), [0.6])
    assert walks is not None
    data = envelope(pendulum, walks)
    assert data.proved is not None and np.all(data.courses <= data.proved + 1e-9)
    reached = float(pendulum.results["states"]["v"]["bound"]["lower"])
    assert walks.late().max() >= 0.999 * reached  # as far as the orbit that is proved
    assert np.all(walks.late() <= data.bounds[0])


def test_sampled_error_curve_lies_below_the_proved_one(pendulum: Accepted) -> None:
    curve = gain_curve(pendulum, point_maps(pendulum)[0])
    assert curve is not None and len(curve.rho) > 50
    line = curve.gain * curve.rho + curve.residual
    assert np.all(curve.phi <= line + 1e-9) and np.all(curve.phi >= 0.75 * line)


def test_k_over_a_gain_touches_the_proved_value(pendulum: Accepted) -> None:
    found = over_gain(pendulum, "kappa")
    assert found is not None and found.proved is not None
    here = found.k[np.argmin(np.abs(found.values - found.at))]
    assert 0.99 * found.proved <= here <= found.proved + 1e-12


def test_two_states_and_a_norm() -> None:
    found = accepted_here(proved((EXAMPLES / "recentring.toml").read_text()))
    maps = point_maps(found)
    reach = [float(found.results["states"][s]["radius"]["lower"]) for s in ("x", "v")]
    walks = walked(found, maps, reach)
    assert walks is not None
    data = envelope(found, walks)
    assert data.proved is not None and np.all(data.courses <= data.proved + 1e-9)
    late = np.abs(walks.late()).max(axis=(0, 1))
    for k, s in enumerate(("x", "v")):
        bound = found.results["states"][s]["bound"]
        assert 0.98 * float(bound["lower"]) <= late[k] <= float(bound["upper"])
    drawn = plane(found, maps[0], walks)
    assert drawn is not None and drawn.outline is not None
    low, high = np.array(drawn.region).T
    at = drawn.outline + np.array(drawn.target)
    assert np.all(at >= low - 0.101) and np.all(at <= high + 0.101)  # the target moves by 0.1 about its middle
    text = Page(html(report(found, figures=False))).text
    assert "in the norm" in text and "a proved orbit reaches 0.0533422 m/s" in text


def test_a_stance_is_simulated_by_the_flow_of_its_proof() -> None:
    text = """format = 1
[state]
v = [0, 1]
[uncertain]
T = [0.3, 0.32]
[define]
foot = "0.14*v + 0.02"
[dynamics]
duration = "T"
[dynamics.start]
x = "-foot"
xd = "v"
[dynamics.rate]
x = "xd"
xd = "9*x"
[next]
v = "xd"
[target]
v = 0.3
[[require]]
that = "gain < 1"
"""
    found = accepted_here(proved(text))
    m = point_maps(found)[0]
    v, t = np.linspace(0, 1, 7), np.linspace(0.3, 0.32, 7)
    exact = -3 * np.sinh(3 * t) * (0.14 * v + 0.02) + np.cosh(3 * t) * v
    assert np.allclose(m.next({"v": v, "T": t})[:, 0], exact, rtol=0, atol=1e-9)


# --- figures of the proof, rounded -------------------------------------------------------------------------------------


@pytest.mark.parametrize("text", ["1/3", "-1/3", "0.064952583129546397717", "-9.7885", "1e-30", "123456789.5", "0", "7", "1e400",
                                  f"1{'0' * 8999}1/3{'0' * 8999}", f"-1{'0' * 8999}1/3{'0' * 8999}"])  # fmt: skip
def test_numbers_are_rounded_to_the_side_on_which_they_hold(text: str) -> None:
    x = exact(text)
    down, up = Fraction(rounded(x, False)), Fraction(rounded(x, True))
    assert down <= x <= up and up - down <= abs(x) * Fraction(2, 10**5)


def test_margins_are_not_overstated(pendulum: Accepted) -> None:
    rows = {r.that: r for r in judged(pendulum.claim, pendulum.results)}
    gain = Fraction(pendulum.results["gain"]["upper"])
    spare = Fraction(rows["gain < 0.4"].margin)
    assert spare <= Fraction("0.4") - gain <= spare * Fraction(102, 100)
    assert rows["settles"].margin.endswith("m/s") and rows["settles"].share.endswith("%")


def test_gain_intervals_are_rounded_inwards_and_say_what_they_are() -> None:
    entry = {"gain": "kappa", "inner": ["0.07964912345", "0.14300798765"], "set": "region", "outer": [None, "0.143046"],
             "contracting": ["1/30", "1/3"], "best": {"value": "1/7", "gain": "0.123456789"}}  # fmt: skip
    (told,) = gain_intervals({"gain_intervals": [entry]})
    assert told.proved == "from 0.0796492 to 0.143007, on the region" and told.refuted == "at 0.143046"
    assert (
        told.contracting == "strictly between 0.0333334 and 0.333333" and told.best == "k ≤ 0.123457 at about 0.142858"
    )
    none = {**entry, "inner": None, "set": None, "outer": [None, None], "contracting": None, "best": None}
    (told,) = gain_intervals({"gain_intervals": [none]})
    assert (told.proved, told.refuted, told.contracting, told.best) == ("", "", "", "")


# --- hostile text -------------------------------------------------------------------------------------------------------


def test_hostile_text_is_inert_in_a_page(hostile: Accepted) -> None:
    raw = html(report(hostile))
    page = Page(raw)
    assert not {"script", "img"} & {t for t, _ in page.met} and "<script" not in raw.decode()
    assert EVIL.split("\u202e")[0] in page.text  # shown as it is
    assert all(c.isprintable() or c == "\n" for c in raw.decode())
    assert "[U+202E]" in page.text and "[U+001B]" in page.text
    assert not [a for t, a in page.met if t == "a" and not (a["href"] or "").startswith("#")]


def test_hostile_text_is_inert_in_latex(hostile: Accepted) -> None:
    text = latex(report(hostile)).decode()
    assert "\\input" not in text and "\\textbackslash{}input\\{" in text
    assert "\x1b" not in text and "\u202e" not in text and "example.org" in text
    body = text[text.index("\\begin{document}") :]
    assert body.isascii()
    commands = set(re.findall(r"\\([A-Za-z]+)", body))
    known = set(re.findall(r"\\([A-Za-z]+)", latex(report_of_plain()).decode()))
    extra = {
        "char",
        "textbackslash",
        "textless",
        "textgreater",
        "textasciicircum",
        "textasciitilde",
        "textbar",
        "cases",
        "log",
    }
    assert commands <= known | extra, commands - known - extra


def report_of_plain() -> Document:
    """The same report without anything hostile, for comparison."""
    text = """format = 1
title = "t"
notes = "n"
[state]
v = { range = [-1, 1], unit = "m/s" }
[uncertain]
d = { range = [-0.01, 0.01], unit = "m" }
[library]
file = "x.csv"
at = { speed = "v" }
[next]
v = "kept + d"
[target]
v = 0
[[require]]
that = "bound(v) <= 0.05"
[[require]]
that = "sensitivity(v, d) >= 0.5"
"""
    return report(accepted_here(proved(text, data={"x.csv": "speed,kept\n-1,-0.4\n0,0\n1,0.4\n"})))


def test_hostile_text_is_inert_in_markdown(hostile: Accepted) -> None:
    text = markdown(report(hostile)).decode()
    outside = "".join(text.split("```")[::2])
    assert (
        "<script" not in outside
        and not re.search(r"(?<!\\)\]\(", outside)
        and "\x1b" not in text
        and "\u202e" not in text
    )
    assert "\\[b\\](http\\://" in outside and "\\`a\\`" in outside


def test_hostile_text_is_inert_in_the_terminal(hostile: Accepted) -> None:
    from rich.console import Console

    from ultibound.report.terminal import outcome

    console = Console(file=(out := __import__("io").StringIO()), width=200, color_system=None)
    console.print(outcome(hostile.claim, hostile.results))
    for text in (out.getvalue(), plain(explained(hostile.claim))):
        assert all(c.isprintable() or c == "\n" for c in text) and "[U+001B]" in text


@pytest.mark.parametrize(
    "text", ["a\nb", "\r\x1b[31m", "\u2066x\u2069", "\x00", "\ufeff", "é ö κ 漢", "```\n# h", "\\end{document}"]
)
def test_escapes(text: str) -> None:
    assert all(c.isprintable() for c in visible(text))
    assert all(c.isprintable() or c == "\n" for c in visible(text, lines=True))
    assert tex(text).isascii() or "ö" not in text
    assert "\\end{" not in tex(text)
    fence = fenced(text).split("text\n")[0]
    assert fence not in fenced(text)[len(fence) :].rsplit(fence, 1)[0]
    assert not re.search(r"(?<!\\)[`*_\[\]|]|^#", escaped(text))


# --- only what the checker accepted --------------------------------------------------------------------------------------


def spoiled(found: Accepted) -> bytes:
    """The same certificate, claiming a smaller bound, sealed anew."""
    entries = json.loads(found.data)
    entries["results"]["bound"]["upper"] = entries["results"]["states"]["v"]["bound"]["upper"] = "0.001"
    return Certificate({**entries, "digest": digest(entries)}).to_bytes()


def test_a_spoiled_certificate_gives_no_report(pendulum: Accepted, tmp_path: Path) -> None:
    assert check(spoiled(pendulum)).status == "invalid"
    with pytest.raises(NotAccepted, match=r"results\.bound"):
        accepted(spoiled(pendulum))
    cert, target = tmp_path / "c.cert.json", tmp_path / "c.html"
    cert.write_bytes(spoiled(pendulum))
    target.write_text("old")
    for arguments in (["report", cert], ["report", cert, "-o", target], ["bundle", cert, "-o", target]):
        done = run_here(*arguments)
        assert done[0] == 2 and len(done[2].strip().splitlines()) == 1 and "does not accept" in done[2]
        assert target.read_text() == "old" and sorted(p.name for p in tmp_path.iterdir()) == ["c.cert.json", "c.html"]


def test_a_certificate_changed_in_memory_is_checked_again(pendulum: Accepted) -> None:
    made = proved((EXAMPLES / "pendulum.toml").read_text())
    assert made.accepted is not None and accepted_here(made).digest == pendulum.digest
    copied = pickle.loads(pickle.dumps(made))
    assert copied == made and copied.accepted is None and copied.to_bytes() == pendulum.data
    entries = json.loads(spoiled(pendulum))
    with pytest.raises(NotAccepted):
        accepted_here(replace(made, entries=entries))


def test_notebook(pendulum: Accepted) -> None:
    from ultibound import Certificate as Shown
    from ultibound import read_claim

    claim: Any = read_claim(EXAMPLES / "pendulum.toml")
    assert "<math" in claim._repr_html_() and claim._repr_latex_().startswith("$") and r"\cosh" in claim._repr_latex_()
    good: Any = Shown.from_bytes(pendulum.data)
    assert "✓ proved" in good._repr_html_() and r"\varepsilon &\le 0.0489444" in good._repr_latex_()
    bad: Any = Shown.from_bytes(spoiled(pendulum))
    assert "Nothing is proved" in bad._repr_html_() and "0.001" not in bad._repr_html_()
    assert "Nothing is proved" in bad._repr_latex_()


# --- commands, files ------------------------------------------------------------------------------------------------------


def run_here(*arguments: object) -> tuple[int, str, str]:
    from contextlib import redirect_stderr, redirect_stdout
    from io import StringIO

    from ultibound.cli import main

    with redirect_stdout(StringIO()) as out, redirect_stderr(StringIO()) as err, pytest.raises(SystemExit) as stop:
        main(list(map(str, arguments)))
    assert isinstance(stop.value.code, int)
    return stop.value.code, out.getvalue(), err.getvalue()


@pytest.fixture
def cert(pendulum: Accepted, tmp_path: Path) -> Path:
    path = tmp_path / "walk.cert.json"
    path.write_bytes(pendulum.data)
    return path


def test_the_same_bytes_elsewhere(cert: Path, document: Document, pendulum: Accepted, tmp_path: Path) -> None:
    """Another process, locale, time zone, hash seed and working directory."""
    code = """
import sys
from pathlib import Path
from ultibound.report.accepted import accepted
from ultibound.report.bundle import bundle
Path(sys.argv[2]).write_bytes(bundle(accepted(Path(sys.argv[1]).read_bytes())))
"""
    environment = {**os.environ, "PYTHONHASHSEED": "77", "TZ": "Asia/Tokyo", "LC_ALL": "C", "OMP_NUM_THREADS": "1"}
    target = tmp_path / "other.zip"
    subprocess.run(
        [sys.executable, "-c", code, str(cert), str(target)], env=environment, cwd="/", check=True, timeout=100
    )
    assert target.read_bytes() == bundle(pendulum)
    with zipfile.ZipFile(target) as z:
        found = {n: z.read(n) for n in z.namelist()}
    assert found["report.html"] == html(document) and found["report.tex"] == latex(document)
    assert found["report.md"] == markdown(document) and found["certificate.cert.json"] == pendulum.data
    claim = (EXAMPLES / "pendulum.toml").read_bytes()
    assert found["claim/claim.toml"] == claim
    assert plain(explained(pendulum.claim)) == plain(explained(accepted(pendulum.data).claim))


def test_the_supplement_checks_itself_in_an_empty_folder(hostile: Accepted, tmp_path: Path) -> None:
    data = bundle(hostile)
    with zipfile.ZipFile(BytesIO(data)) as z:
        assert (
            z.testzip() is None and z.namelist() == sorted(z.namelist()) and len(set(z.namelist())) == len(z.namelist())
        )
        assert {i.date_time for i in z.infolist()} == {(1980, 1, 1, 0, 0, 0)}
        for i in z.infolist():
            assert not i.filename.startswith("/") and ".." not in i.filename and i.external_attr >> 16 == 0o100644
        z.extractall(tmp_path)
    said = (tmp_path / "README.txt").read_text()
    assert "[U+001B]" in said and "\x1b" not in said
    command = re.search(r"^  python3 (-I -S check_certificate.+)$", said, re.M)
    assert command is not None
    done = subprocess.run(
        [sys.executable, *command[1].split()],
        cwd=tmp_path,
        env={},
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )
    assert done.returncode == 0 and done.stdout.startswith("VALID"), done
    claim = tmp_path / "claim" / "claim.toml"
    claim.write_text(claim.read_text().replace("0.01", "0.02"))
    done = subprocess.run(
        [sys.executable, *command[1].split()],
        cwd=tmp_path,
        env={},
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )
    assert done.returncode == 1 and "differs" in done.stdout


@pytest.mark.parametrize("names, called", [
    (["gaits.csv"], "claim.toml"), (["claim.toml"], "claim1.toml"), (["Claim.TOML", "claim1.toml"], "claim2.toml"),
    (["claim.toml/x.csv"], "claim1.toml"), (["a.csv", "A.csv"], None), (["a/x.csv", "A/y.csv"], None), (["a", "A/x.csv"], None),
])  # fmt: skip
def test_names_in_a_supplement_differ_on_every_system(pendulum: Accepted, names: list[str], called: str | None) -> None:
    found = replace(pendulum, files=dict.fromkeys(names, ""))
    if called is None:
        with pytest.raises(NotAccepted, match="rename one"):
            claim_name(found)
    else:
        assert claim_name(found) == called


def test_commands_write_what_they_say(cert: Path) -> None:
    status, out, err = run_here("report", cert)
    assert (
        (status, out) == (0, "")
        and (cert.parent / "walk.html").read_bytes().startswith(b"<!DOCTYPE html>")
        and "walk.html" in err
    )
    before = cert.read_bytes()
    for target, why in ((cert, "the certificate itself"), (cert.parent, "is a directory"), (cert.with_name("x.pdf"), "a report ends in"),
                        (cert.parent / "none" / "x.html", "No such folder")):  # fmt: skip
        for command in ("report", "bundle"):
            if command == "bundle" and target.suffix == ".pdf":
                continue
            status, out, err = run_here(command, cert, "-o", target)
            expected = why if command == "bundle" or target not in (cert, cert.parent) else "a report ends in"
            assert status == 2 and not out and len(err.strip().splitlines()) == 1 and expected in err, (
                command,
                target,
                err,
            )
    assert cert.read_bytes() == before and sorted(p.name for p in cert.parent.iterdir()) == [
        "walk.cert.json",
        "walk.html",
    ]


def test_what_is_no_certificate_gives_a_clean_error(tmp_path: Path) -> None:
    fifo, empty, deep = tmp_path / "fifo", tmp_path / "empty", tmp_path / "deep"
    os.mkfifo(fifo)
    empty.write_bytes(b"")
    deep.write_bytes(b"[" * 1_000_000)
    for path in (fifo, empty, deep, tmp_path, Path("/dev/zero"), tmp_path / "missing", EXAMPLES / "pendulum.toml"):
        for command in ("report", "bundle"):
            status, out, err = run_here(command, path, "-o", tmp_path / "x.html")
            assert status == 2 and not out and len(err.strip().splitlines()) == 1, (path, err)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["deep", "empty", "fifo"]


def test_a_link_is_followed_and_a_full_disk_leaves_the_old_file(cert: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    real, link = cert.with_name("real.html"), cert.with_name("link.html")
    real.write_text("old")
    link.symlink_to(real)

    def full(handle: int) -> None:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as m:
        m.setattr(os, "fsync", full)
        status, _, err = run_here("bundle", cert, "-o", link)
        assert status == 2 and "No space left" in err and real.read_text() == "old"
    assert sorted(p.name for p in cert.parent.iterdir()) == ["link.html", "real.html", "walk.cert.json"]
    assert (
        run_here("report", cert, "-o", link)[0] == 0
        and link.is_symlink()
        and real.read_bytes().startswith(b"<!DOCTYPE")
    )


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere; run as another user")
def test_a_folder_that_may_only_be_read(cert: Path) -> None:
    folder = cert.parent / "closed"
    folder.mkdir(0o500)
    assert run_here("report", cert, "-o", folder / "r.html")[0] == 2


@pytest.mark.parametrize("moments", [50 if LONG else 3])
def test_killed_while_writing_the_target_is_whole(cert: Path, moments: int, tmp_path: Path) -> None:
    """The old bytes or the new ones: killed at random moments of a process that writes again and again."""
    code = """
import sys
from pathlib import Path
from ultibound.certificate.certificate import write_whole
print("ready", flush=True)
while True:
    for c in (b"a", b"b"):
        write_whole(Path(sys.argv[1]), c * 3_000_000)
"""
    target = tmp_path / "t" / "r.html"
    target.parent.mkdir()
    rng = np.random.default_rng(5)
    for _ in range(moments):
        target.write_bytes(b"a" * 3_000_000)
        process = subprocess.Popen([sys.executable, "-c", code, str(target)], stdout=subprocess.PIPE)
        assert process.stdout is not None and process.stdout.readline() == b"ready\n"
        try:
            process.wait(timeout=float(rng.uniform(0, 0.05)))
        except subprocess.TimeoutExpired:
            process.kill()
        process.wait()
        process.stdout.close()
        data = target.read_bytes()
        assert len(data) == 3_000_000 and data in (b"a" * 3_000_000, b"b" * 3_000_000)


def test_explain(tmp_path: Path) -> None:
    status, out, err = run_here("explain", EXAMPLES / "striding.toml")
    assert status == 0 and not err
    for part in ("Nothing of it has been proved", "xd′ = (g + height′′)/height·x + gust", "∂foot/∂v = ∂reach/∂v + ∂shift/∂v", "any course in its range",
                 "9 × 6 gaits", "slope[v,v]", "target-slope[v,v_cmd]", "sector-residual[v]", "shell[j]", "require[7]", "[0.36, 0.42]"):  # fmt: skip
        assert part in out, part
    status, out, _ = run_here("explain", EXAMPLES / "sidestepping.toml", "--latex", "--set", "kappa=0.3")
    assert (
        status == 0
        and out.startswith("\\documentclass")
        and out.rstrip().endswith("\\end{document}")
        and "$0.3$" in out
    )
    bad = tmp_path / "bad.toml"
    bad.write_text("format = 1\n")
    for arguments in ([bad], [tmp_path], [tmp_path / "none"], [EXAMPLES / "pendulum.toml", "--set", "none=1"]):
        status, out, err = run_here("explain", *arguments)
        assert status == 2 and not out and err.strip() and "Traceback" not in err


def test_explain_says_what_cannot_be_proved_yet(tmp_path: Path) -> None:
    text = (EXAMPLES / "striding.toml").read_text().replace('duration = "T"', 'until = "x"\nwithin = [0.2, 0.6]')
    claim = tmp_path / "c.toml"
    claim.write_text(text)
    (tmp_path / "strides.csv").write_bytes((EXAMPLES / "strides.csv").read_bytes())
    status, out, _ = run_here("explain", claim)
    assert status == 0 and "cannot be proved yet" in " ".join(out.split()) and "falls to 0" in out


# --- other programs --------------------------------------------------------------------------------------------------------

FLAGS = ["--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-sync", "--disable-background-networking",
         "--disable-component-update", "--enable-logging=stderr", "--window-size=1200,900"]  # fmt: skip


def browsed(chromium: str, page: Path, home: Path) -> tuple[list[str], list[str]]:
    """What the console said, and what the page asked any address for."""
    log = home / "net.json"
    done = subprocess.run(
        [chromium, *FLAGS, f"--user-data-dir={home / 'profile'}", f"--log-net-log={log}", f"--screenshot={home / 'page.png'}", page.as_uri()],
        capture_output=True, text=True, timeout=120, check=False,
    )  # fmt: skip
    assert done.returncode == 0 and (home / "page.png").stat().st_size > 3000, done.stderr[-2000:]
    asked = [e["params"] for e in json.loads(log.read_text())["events"] if "url" in e.get("params", {})]
    origins = [p["url"] for p in asked if p.get("initiator", "not an origin") != "not an origin"]
    return [x for x in done.stderr.splitlines() if "CONSOLE" in x], [u for u in origins if not u.startswith("file:")]


def test_in_a_browser_nothing_complains_and_nothing_is_asked_for(document: Document, tmp_path: Path) -> None:
    chromium = installed("chromium") or installed("chromium-browser")
    if chromium is None:
        pytest.skip("apt-get install -y --no-install-recommends chromium")
    bad, good = tmp_path / "bad.html", tmp_path / "good.html"
    bad.write_text(
        '<!DOCTYPE html><title>x</title><img src="http://localhost:9/a.png"><script>console.error("here")</script>'
    )
    said, asked = browsed(chromium, bad, tmp_path)  # the test sees what it looks for
    assert any("here" in x for x in said) and any("localhost:9" in u for u in asked)
    good.write_bytes(html(document))
    assert browsed(chromium, good, tmp_path) == ([], [])


def test_latex_compiles(document: Document, hostile: Accepted, tmp_path: Path) -> None:
    from ultibound.report.theorem import for_a_paper

    pdflatex = installed("pdflatex")
    if pdflatex is None:
        pytest.skip("apt-get install -y --no-install-recommends texlive-latex-base")
    copied = for_a_paper(hostile)[1]
    excerpt = (
        "\\documentclass{article}\\usepackage{amsmath,longtable}\\begin{document}\n" + copied.text + "\\end{document}\n"
    )  # type: ignore[union-attr]
    texts = {
        "a": latex(document),
        "b": latex(report(hostile)),
        "c": excerpt.encode(),
        "d": latex(explained(hostile.claim)),
    }
    for name, data in texts.items():
        (tmp_path / f"{name}.tex").write_bytes(data)
        done = subprocess.run([pdflatex, "-interaction=nonstopmode", "-halt-on-error", "-no-shell-escape", f"{name}.tex"],
                              cwd=tmp_path, capture_output=True, timeout=100, check=False)  # fmt: skip
        assert done.returncode == 0, done.stdout[-1500:]
        assert (tmp_path / f"{name}.pdf").stat().st_size > 5000
