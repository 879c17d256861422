"""Files made to take long, to take much, or to get elsewhere: each is told as a mistake within 5 s and 500 MB.

All are looked at in one process with limits of the system's own: of memory for the whole, of processor time for each.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

import simcore

ROOT = Path(simcore.__file__).parent.parent
BASE = "reference g\na -> g: source e, sine = 10 V peak, frequency = 50 Hz\na -> g: resistor R1, 100 Ohm\nstudy s: settled\n"
TRACE = 'a -> g: source e2, samples = "{}", column = "x [V]", period = 1 s, series_resistance = 1 Ohm\n'
COPIES = "repeat k from 1 to 9990 {\n" + "".join(f"a -> g: resistor X{n}[k], 1 Ohm\n" for n in range(3)) + "}\n"
BOMB = "block b0(p, q) {\np -> q: resistor R, 1 Ohm\n}\n" + "".join(
    f"block b{n}(p, q) {{\n" + "".join(f"(p, q): b{n - 1} X{k}\n" for k in range(10)) + "}\n" for n in range(1, 12)
)
MISTAKES = {
    "size": ("# " + "x" * 90 + "\n") * 4000,
    "line": BASE + "let V = 1" + " + 1" * 4000,
    "brackets": BASE + "let V = " + "(" * 4000 + "1" + ")" * 4000,
    "signs": BASE + "let V = " + "-" * 4900 + "1",
    "powers": BASE + "let V = " + "2^" * 3000 + "1",
    "tower": BASE + "let V = 9^9^9^9^9",
    "indices in indices": BASE + "a" + "[a" * 2000 + "]" * 2000 + " -> g: resistor R2, 1 Ohm",
    "an index": BASE + "a[1e300] -> g: resistor R2, 1 Ohm",
    "braces": BASE + "repeat k from 1 to 2 {\n" * 2000 + "}\n" * 2000,
    "copies": BASE + "repeat k from 1 to 1e9 { a -> g: resistor X[k], 1 Ohm }",
    "copies of copies": BASE + "repeat k from 1 to 9999 {\nrepeat j from 1 to 9999 {\n}\n}",
    "elements": BASE + COPIES,
    "blocks of blocks": BASE + BOMB + "(a, g): b11 Z",
    "a block in itself": BASE + "block x(p, q) {\n(p, q): x Y\n}\n(a, g): x Z",
    "lets on lets": BASE + "let v0 = 1 V\n" + "".join(f"let v{n} = v{n - 1} * 2\n" for n in range(1, 5000)),
    "lets in a circle": BASE + "".join(f"let v{n} = v{(n + 1) % 3000}\n" for n in range(3000)),
    "names of a sweep": BASE + "sweep w: open or short each of R[1..999999999]",
    "samples of a sweep": BASE + "let V = 1 V tolerance 1 %\nsweep w: 1e12 samples of V, seed = 1",
    "periods": BASE.replace("settled", "transient, duration = 1e9 s"),
    "rows": BASE.replace("settled", "transient, duration = 100 s, record_every = 1 ns"),
    "files deep": 'use "deep0.rect"\n' + BASE,
    "files in a circle": 'use "circle.rect"\n' + BASE,
    "many files": "".join(f'use "wide{n}.rect"\n' for n in range(201)) + BASE,
    "a file above": 'use "../above.rect"\n' + BASE,
    "a file by its full path": f'use "{os.devnull}"\n' + BASE,
    "a link out": 'use "link.rect"\n' + BASE,
    "a link to itself": 'use "round.rect"\n' + BASE,
    "a pipe": 'use "pipe.rect"\n' + BASE,
    "numbers above": BASE + TRACE.format("../above.csv"),
    "a link to numbers": BASE + TRACE.format("link.csv"),
    "a device": BASE + TRACE.format("device.csv"),
    "many numbers": BASE + TRACE.format("huge.csv"),
    "many rows": BASE + TRACE.format("rows.csv"),
    "no numbers": BASE + TRACE.format("none.csv"),
    "code": BASE + "let __import__('os').system('id') = 1 V\nlet {0.__class__} = 1 V\nlet exec(x) = 1 V",
}
SOUND = {
    "as many elements as there may be": BASE + COPIES.replace("a -> g: resistor X2[k], 1 Ohm\n", ""),
    "names like code": BASE + "let exec = 1 Ohm\na -> lambda: resistor eval, exec\nlambda -> g: resistor import, 1 Ohm\n"
    'observe print = voltage(lambda)\npurpose "{0.__class__} %s %n $(id) `id` \'; import os #"',
}
CHILD = """
import contextlib, io, json, resource, signal, sys
resource.setrlimit(resource.RLIMIT_AS, (500 * 2**20, 500 * 2**20))
from simcore.command import main
ends = {}
for name in json.load(sys.stdin):
    out, err = io.StringIO(), io.StringIO()
    signal.setitimer(signal.ITIMER_PROF, 5.0)
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = main(["look", name])
    signal.setitimer(signal.ITIMER_PROF, 0.0)
    ends[name] = status, out.getvalue()[:1000], err.getvalue()
json.dump(ends, sys.stdout)
"""


def placed(folder: Path) -> None:
    """The files beside the descriptions, and those above that must not be read."""
    for n in range(20):
        (folder / f"deep{n}.rect").write_text(f'use "deep{n + 1}.rect"\n')
    for n in range(201):
        (folder / f"wide{n}.rect").write_text(f"let z{n} = 1 V\n")
    (folder / "circle.rect").write_text('use "circle.rect"\n')
    for name, target in (("link.rect", "../above.rect"), ("round.rect", "round.rect"), ("link.csv", "../above.csv"), ("device.csv", "/dev/zero")):  # fmt: skip
        (folder / name).symlink_to(target)
    os.mkfifo(folder / "pipe.rect")
    rows = "".join(f"{n * 1e-6:.6f},1\n" for n in range(60_000))
    (folder / "rows.csv").write_text("time [s],x [V]\n" + rows)
    (folder / "huge.csv").write_text("time [s],x [V]\n" + rows * 3)
    (folder / "none.csv").write_text("time [s],x [V]\n0,nan\n0.1,inf\n1,1e999\n")
    (folder.parent / "above.rect").write_text("let secret = 1 V\n")
    (folder.parent / "above.csv").write_text("time [s],x [V]\n0,1\n1,2\n")


@pytest.fixture(scope="module")
def ends(tmp_path_factory: pytest.TempPathFactory) -> dict[str, list]:
    folder = tmp_path_factory.mktemp("bounds") / "design"
    folder.mkdir()
    placed(folder)
    for name, text in (MISTAKES | SOUND).items():
        (folder / f"{name}.rect").write_text(text)
    done = subprocess.run(
        [sys.executable, "-c", CHILD],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"},
        input=json.dumps([f"{name}.rect" for name in (*MISTAKES, *SOUND)]),
        capture_output=True,
        text=True,
        timeout=300,
        check=False,
    )
    assert done.returncode == 0, f"it ended by {done.returncode}: {done.stderr[-2000:]}"
    return json.loads(done.stdout)


@pytest.mark.parametrize("name", MISTAKES)
def test_what_is_beyond_a_bound_is_a_mistake(name: str, ends: dict[str, list]) -> None:
    status, out, err = ends[f"{name}.rect"]
    assert (status, out) == (2, "") and "cure:" in err and "secret" not in err
    assert max(map(len, err.split("\n"))) < 11_000


@pytest.mark.parametrize("name", SOUND)
def test_what_is_within_the_bounds_is_understood(name: str, ends: dict[str, list]) -> None:
    assert ends[f"{name}.rect"][::2] == [0, ""]
