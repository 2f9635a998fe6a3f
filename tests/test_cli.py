"""The commands as a user meets them: exit statuses, outputs, bad input, interruption."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from contextlib import redirect_stderr, redirect_stdout
from io import StringIO
from pathlib import Path

import pytest

from ultibound.cli import main

EXAMPLES = Path(__file__).parents[1] / "ultibound" / "examples"
LONG = bool(os.environ.get("ULTIBOUND_LONG"))
COMMAND = [sys.executable, "-c", "from ultibound.cli import main; main()"]


def run(*arguments: object, limit: float = 60) -> subprocess.CompletedProcess[str]:
    return subprocess.run([*COMMAND, *map(str, arguments)], capture_output=True, text=True, timeout=limit, check=False)


def run_here(*arguments: object) -> subprocess.CompletedProcess[str]:
    """As `run`, without the start of a process: what is said and the exit status."""
    words = list(map(str, arguments))
    with redirect_stdout(StringIO()) as out, redirect_stderr(StringIO()) as err, pytest.raises(SystemExit) as stop:
        main(words)
    code = stop.value.code
    assert isinstance(code, int)
    return subprocess.CompletedProcess(words, code, out.getvalue(), err.getvalue())


@pytest.fixture(scope="module")
def certificate(tmp_path_factory: pytest.TempPathFactory) -> Path:
    target = tmp_path_factory.mktemp("cert") / "p.cert.json"
    done = run("prove", EXAMPLES / "pendulum.toml", "-o", target)
    assert done.returncode == 0, done.stderr
    assert "proved" in done.stdout and "not a machine" in done.stdout and "m/s" in done.stdout
    return target


def test_the_demo_proves_everything_and_overwrites_nothing(tmp_path: Path) -> None:
    """Its main claim takes a while: here another in its place, which is kept. `.ci/run` runs the demo as it is."""
    folder = tmp_path / "demo"
    folder.mkdir()
    mine = folder / "pendulum.toml"
    mine.write_text("mine")
    claim, certificate = folder / "striding.toml", folder / "striding.cert.json"
    if not LONG:
        claim.write_text((EXAMPLES / "interpolated.toml").read_text())
    done = run("demo", "-o", folder, limit=400)
    assert done.returncode == 0, done.stderr + done.stdout
    assert mine.read_text() == "mine" and done.stderr.count("which you changed") == (1 if LONG else 2)
    for item in EXAMPLES.glob("*.*"):
        kept = item.name == "pendulum.toml" or (item.name == "striding.toml" and not LONG)
        assert item.suffix not in (".toml", ".csv") or (folder / item.name).read_bytes() == item.read_bytes() or kept
    assert "by library cell" in done.stdout and "an estimate" in done.stdout
    again = run("check", certificate, "--all-proved", "--claim", claim, limit=200)
    assert again.returncode == 0 and " 0 refuted, 0 undecided" in again.stdout
    assert "7 proved" in again.stdout or not LONG


def test_the_library_of_the_demo() -> None:
    assert len((EXAMPLES / "strides.csv").read_text().splitlines()) - 1 >= 40


def test_a_refuted_claim_exits_1_and_its_certificate_holds(tmp_path: Path) -> None:
    target = tmp_path / "o.json"
    done = run("prove", EXAMPLES / "overstep.toml", "-o", target, "--json")
    assert done.returncode == 1
    results = json.loads(done.stdout)
    assert results["requirements"][0]["verdict"] == "refuted" and results["certificate"] == str(target)
    assert run_here("check", target).returncode == 0
    assert run_here("check", target, "--all-proved").returncode == 1


def test_set_changes_a_gain_and_the_certificate_says_so(tmp_path: Path, certificate: Path) -> None:
    target = tmp_path / "s.json"
    assert run_here("prove", EXAMPLES / "pendulum.toml", "--set", "kappa=0.12", "-o", target).returncode == 0
    assert json.loads(target.read_text())["claim"]["set"] == {"kappa": "0.12"}
    other = run_here("check", target, "--claim", EXAMPLES / "pendulum.toml")
    assert other.returncode == 1 and "changed gains: kappa = 0.12" in other.stdout
    assert run_here("check", certificate, "--claim", EXAMPLES / "pendulum.toml").returncode == 0


def test_a_certificate_of_another_map_names_the_line(tmp_path: Path, certificate: Path) -> None:
    changed = tmp_path / "pendulum.toml"
    text = (EXAMPLES / "pendulum.toml").read_text()
    changed.write_text(text.replace("kappa = 0.1 ", "kappa = 0.11"))
    line = 1 + next(k for k, x in enumerate(text.splitlines()) if x.startswith("kappa"))
    done = run_here("check", certificate, "--claim", changed)
    assert done.returncode == 1 and f"line {line} differs" in done.stdout


@pytest.mark.parametrize("arguments", [
    ["prove", "--set", "kappa"], ["prove", "--set", "kappa=1_0"], ["prove", "--set", "nope=1"], ["prove", "--set", "kappa=v"],
    ["prove", "--gain-interval", "kapa"], ["prove", "--gain-interval", "z"],
])  # fmt: skip
def test_unusable_options_exit_2(arguments: list[str], tmp_path: Path) -> None:
    done = run_here(*arguments, EXAMPLES / "pendulum.toml", "-o", tmp_path / "x.json")
    assert done.returncode == 2 and "Traceback" not in done.stderr and done.stderr.strip()
    assert not (tmp_path / "x.json").exists()


BASE = """
format = 1
[state]
v = { range = [-1, 1], unit = "m/s" }
[uncertain]
d = [-0.01, 0.01]
[next]
v = "NEXT"
[target]
v = 0.5
EXTRA
"""


@pytest.mark.parametrize("next_, extra, said", [
    ("sqrt(v)", "", "root of a negative number"),
    ("1/(v - 0.3)", "", "division by zero"),
    ("log(v + 1)", "", "logarithm"),
    ("tan(2*v)", "", "tangent at a pole"),
    ("asin(2*v)", "", "asin of a number beyond 1"),
    ("v/2 + a*b*c", "", "combinations"),
    ("v/2", "[[require]]\nthat = 'value(log(v))'", "logarithm"),
    ("v/2", "route = 'sector'", "name exactly one in `correction`"),
    ("v/2", "route = 'sector'\ncorrection = ['half']\nhorizon = 2\ndefine = { half = 'v/2' }", "one step at a time"),
    ("v/2", "route = 'split'", "name it in `correction`"),
])  # fmt: skip
def test_what_cannot_be_used_is_said_in_one_line(next_: str, extra: str, said: str, tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    text = BASE.replace("NEXT", next_)
    text = extra + "\n" + text.replace("EXTRA", "") if extra.startswith("route") else text.replace("EXTRA", extra)
    many = ", ".join(str(k) for k in range(200))
    text = text.replace(
        "[next]", f"a = {{ values = [{many}] }}\nb = {{ values = [{many}] }}\nc = {{ values = [{many}] }}\n[next]"
    )
    claim.write_text(text)
    done = run_here("prove", claim)
    assert done.returncode == 2, done
    assert said in done.stderr and len(done.stderr.strip().splitlines()) == 1 and "c.toml" in done.stderr
    assert list(tmp_path.iterdir()) == [claim]


GUSTY = """
format = 1
horizon = 2
[state]
v = [0, 1]
[uncertain]
gust = { range = [-0.1, 0.1], within = true }
[dynamics]
duration = 0.4
[dynamics.start]
x = "-v/5"
xd = "v"
[dynamics.rate]
x = "xd"
xd = "15*x + gust"
[next]
v = "xd"
[target]
v = 0.5
"""


@pytest.mark.parametrize("text, said", [
    (GUSTY, "horizon: a signal within the stance is followed for one step at a time only"),
    ("horizon = 2" + BASE.replace("NEXT", "v/2").replace("EXTRA", "").replace("[next]", "h = { values = [0, 1], held = true, change = 1 }\n[next]"),
     "horizon: a held quantity of a finite list that changes is followed for one step at a time only"),
])  # fmt: skip
def test_steps_that_are_not_taken_together(text: str, said: str, tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    claim.write_text(text)
    done = run_here("prove", claim)
    assert done.returncode == 2 and "c.toml" in done.stderr
    assert said in done.stderr and len(done.stderr.strip().splitlines()) == 1
    claim.write_text(text.replace("horizon = 2", "horizon = 1"))
    assert run_here("prove", claim, "-o", tmp_path / "c.json").returncode in (0, 1)


def test_an_undefined_point_is_shown(tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    claim.write_text(BASE.replace("NEXT", "sqrt(v + 0.5)").replace("EXTRA", ""))
    done = run_here("prove", claim)
    assert done.returncode == 2 and "v = -1" in done.stderr


def test_a_target_outside_the_region_is_an_error(tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    claim.write_text(BASE.replace("NEXT", "v/2").replace("EXTRA", "").replace("v = 0.5", "v = 1.5"))
    done = run_here("prove", claim)
    assert done.returncode == 2 and "outside the region" in done.stderr and "1.5" in done.stderr


def test_a_region_too_small_is_answered_with_the_size_that_would_do(tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    text = (
        BASE.replace("NEXT", "0.5*v + 20*d")
        .replace("EXTRA", "")
        .replace("v = 0.5", "v = 0")
        .replace("[-1, 1]", "[-0.1, 0.1]")
    )
    claim.write_text(text)
    done = run_here("prove", claim, "--json")
    assert done.returncode == 1
    said = json.loads(done.stdout)["requirements"][0]["limited_by"]
    assert "a region of [-0.4" in said and "estimate" in said


@pytest.mark.parametrize("data", [b"", b"x", b"\xff\xfe", b"{" * 65, b"[" * 1_000_000, b'{"a":1,"a":2}', b'{"a":NaN}',
                                  b'{"a":1.5}', b'{"format":"ultibound-certificate/9"}', b"\xef\xbb\xbf{}", b'{"a":"\\ud800"}',
                                  b'{"a":' + b"1" * 5000 + b"}"])  # fmt: skip
def test_a_bad_certificate_is_unreadable(data: bytes, tmp_path: Path) -> None:
    path = tmp_path / "c.json"
    path.write_bytes(data)
    done = run("check", path, limit=10)
    assert done.returncode == 2 and "Traceback" not in done.stderr and len(done.stderr.strip().splitlines()) == 1


def test_files_of_a_wrong_kind(tmp_path: Path) -> None:
    fifo = tmp_path / "fifo"
    os.mkfifo(fifo)
    for path in (tmp_path, fifo, Path("/dev/zero"), tmp_path / "missing"):
        for command in ("prove", "check"):
            # where it might wait for ever, a process that can be ended
            done = run(command, path, limit=10) if path in (fifo, Path("/dev/zero")) else run_here(command, path)
            assert done.returncode == 2 and "Traceback" not in done.stderr, (command, path, done)


def test_an_old_certificate_stays_when_the_claim_is_bad(tmp_path: Path) -> None:
    target, claim = tmp_path / "c.cert.json", tmp_path / "c.toml"
    target.write_text("old")
    claim.write_text("format = 2\n")
    assert run_here("prove", claim).returncode == 2 and target.read_text() == "old"
    assert run_here("prove", EXAMPLES / "pendulum.toml", "-o", tmp_path).returncode == 2


def test_no_work_is_overwritten(tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    claim.write_text(BASE.replace("NEXT", "v/2").replace("EXTRA", ""))
    before = claim.read_text()
    done = run_here("prove", claim, "-o", claim)
    assert done.returncode == 2 and "is the claim" in done.stderr and claim.read_text() == before


def test_a_folder_that_cannot_be_written_is_said(tmp_path: Path) -> None:
    done = run_here("prove", EXAMPLES / "pendulum.toml", "-o", tmp_path / "none" / "c.json")
    assert done.returncode == 2 and "Traceback" not in done.stderr and "none" in done.stderr


def test_a_closed_pipe_is_neither_0_nor_1(certificate: Path) -> None:
    code = f"""
import subprocess, sys
p = subprocess.Popen({[*COMMAND, "check", str(certificate), "--lines"]!r}, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
p.stdout.close()
error = p.stderr.read()
print(p.wait(), b"Traceback" in error)
"""
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60, check=True)
    status, traceback = done.stdout.split()
    assert int(status) not in (0, 1) and traceback == "False"


def test_ctrl_c_keeps_what_is_proved(tmp_path: Path) -> None:
    claim = tmp_path / "c.toml"
    hard = " + ".join(f"0.01*sin({7 * k + 3}*v*a{k}*b)*cos({5 * k + 1}*a{k} + v)" for k in range(4))
    names = "\n".join(f"a{k} = [0, 3]" for k in range(4)) + "\nb = [0, 3]"
    claim.write_text(
        BASE.replace("NEXT", hard)
        .replace("EXTRA", "[effort]\ngap = 1e-9\ncells = 100000000")
        .replace("d = [-0.01, 0.01]", names)
    )
    process = subprocess.Popen(
        [*COMMAND, "prove", str(claim)], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),  # tests run in the background ignore it
    )  # fmt: skip
    time.sleep(4)
    assert process.poll() is None, process.communicate()
    process.send_signal(signal.SIGINT)
    out, error = process.communicate(timeout=120)
    assert process.returncode == 130, (out, error)
    target = tmp_path / "c.cert.json"
    assert run("check", target).returncode == 0 and "interrupted" in error


def test_no_colour_when_asked(tmp_path: Path, certificate: Path) -> None:
    environment = {**os.environ, "NO_COLOR": "1", "FORCE_COLOR": ""}
    done = subprocess.run([*COMMAND, "prove", str(EXAMPLES / "pendulum.toml"), "-o", str(tmp_path / "n.json")],
                          capture_output=True, env=environment, check=True)  # fmt: skip
    assert b"\x1b[" not in done.stdout + done.stderr


def test_the_same_bytes_again(tmp_path: Path, certificate: Path) -> None:
    environment = {**os.environ, "PYTHONHASHSEED": "77", "TZ": "Asia/Tokyo", "LC_ALL": "C"}
    target = tmp_path / "again.json"
    subprocess.run([*COMMAND, "prove", str(EXAMPLES / "pendulum.toml"), "-o", str(target)],
                   capture_output=True, env=environment, cwd=tmp_path, check=True)  # fmt: skip
    assert target.read_bytes() == certificate.read_bytes()


@pytest.mark.parametrize("top, that, verdict, said", [
    ("", "gain < 0.4", "refuted", None),
    ('correction = ["half"]\n', "gain < 0.4", "refuted", None),
    ('correction = ["half"]\nshrink = true\n', "gain < 0.4", "undecided", "another route or set may do better"),
    ('correction = ["half"]\nroute = "sector"\n', "gain < 1.4", "refuted", None),
    ('correction = ["half"]\nroute = "slope"\n', "gain < 0.4", "refuted", None),
    ("", "bound(v) < 0.001", "refuted", None),
    ("", "gain <= 0.5", "proved", None),
])  # fmt: skip
def test_what_other_routes_might_do_is_not_refuted(
    top: str, that: str, verdict: str, said: str | None, tmp_path: Path
) -> None:
    claim = tmp_path / "c.toml"
    text = (
        BASE.replace("NEXT", "0.25 + half + d")
        .replace("EXTRA", f"[[require]]\nthat = '{that}'")
        .replace("[next]", '[define]\nhalf = "v/2"\n[next]')
    )
    claim.write_text(top + text)
    entry = json.loads(run_here("prove", claim, "--json").stdout)["requirements"][0]
    assert entry["verdict"] == verdict
    assert said is None or said in entry["limited_by"]
    if verdict == "refuted":
        assert "of the gain" in entry["limited_by"] or "of the residual" in entry["limited_by"]  # what costs how much
