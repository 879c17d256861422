"""`tidy` as a user runs it: order and layout change, meaning and comments do not."""

from __future__ import annotations

from pathlib import Path

import pytest

import simcore
from grammar import layout
from grammar.layout import in_order, tidy
from grammar.reader import read_text
from simcore.command import main

LIBRARY = simcore.library_folder()
MESSY = """# header of the file
# in two lines

# over the circuit
a->g: source e,sine=10 V peak , frequency = 50 Hz   # the mains
(a -> g) : (s -> t): transformer T, turns = 10 : 1, # first comment inside
  # second comment inside

  magnetising = 1 H

s -> p : diode D_1, law # the diode
p -> t: capacitor C1, C_big, series_resistance = (1 Ohm) + 2*3 mOhm, leakage_resistance = 100 kOhm, initial_voltage = 0 V, rated_voltage = 25 V as "long, one"
reference g, t
# over the lets
let C_big=1000.0 uF tolerance 20% as "reservoir"    # a


let N = 3 # bb

repeat k from 1 to N { # chain
    # over the link
    p -> q[k-1]: resistor R[k], 1 Ohm#r
  # last in the chain
}
datasheet law: diode as "generic, # no comment" { # sheet
  saturation_current = 1 nA, ideality_factor = 1.8 # two keys
  # over the ratings

  rated_reverse_voltage = 1 kV
  # end of the sheet
}
observe u = voltage(p -> t)
study later: transient, duration = 1 s { at 5 ms: open e } # behind
study s: settled
study empty: settled { # nothing in it
}
require s: mean(u)>=0 V as "it is there"
require later: peak(u) <= 22 V      # not too high
purpose "messy"
# at the very end
"""
TIDIED = """# header of the file
# in two lines

purpose "messy"

require s:     mean(u) >= 0 V as "it is there"
require later: peak(u) <= 22 V  # not too high

study later: transient, duration = 1 s {
    at 5 ms: open e
}  # behind
study s:     settled
study empty: settled {  # nothing in it
}

# over the lets
let C_big = 1000 uF tolerance 20 % as "reservoir"  # a

let N = 3  # bb

datasheet law: diode as "generic, # no comment" {  # sheet
    saturation_current = 1 nA
    ideality_factor = 1.8  # two keys
    # over the ratings

    rated_reverse_voltage = 1 kV
    # end of the sheet
}

# over the circuit
a -> g: source e, sine = 10 V peak, frequency = 50 Hz  # the mains
(a -> g) : (s -> t): transformer T, turns = 10 : 1, # first comment inside
    # second comment inside
    magnetising = 1 H

s -> p: diode D_1, law  # the diode
p -> t: capacitor C1, C_big, series_resistance = 1 Ohm + 2 * 3 mOhm, leakage_resistance = 100 kOhm,
    initial_voltage = 0 V, rated_voltage = 25 V as "long, one"

repeat k from 1 to N {  # chain
    # over the link
    p -> q[k-1]: resistor R[k], 1 Ohm  # r
    # last in the chain
}
reference g, t

observe u = voltage(p -> t)

# at the very end
"""


def run(*arguments: str | Path) -> int:
    return main(["tidy", *map(str, arguments)])


def test_a_messy_file_comes_out_in_order_with_every_comment(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "messy.rect"
    file.write_text(MESSY)
    assert run(file) == 0
    assert file.read_text() == TIDIED.replace("# r\n", "#r\n")
    assert capsys.readouterr().out == f"{file}: tidied\n"
    written = file.stat().st_mtime_ns
    assert run(file) == 0
    assert capsys.readouterr().out == f"{file}: tidy already\n" and file.stat().st_mtime_ns == written
    assert [path.name for path in tmp_path.iterdir()] == ["messy.rect"]


@pytest.mark.parametrize("path", sorted(LIBRARY.rglob("*.rect")), ids=lambda path: path.stem)
def test_every_shipped_file_can_be_tidied_and_means_the_same(path: Path) -> None:
    text = path.read_text("utf-8")
    result, mistakes = tidy(text, path.name)
    assert mistakes == [] and result is not None
    assert read_text(result, "")[0] == in_order(read_text(text, "")[0])
    assert result.count("#") == text.count("#") and tidy(result, "")[0] == result


def test_a_mistake_in_one_file_leaves_all_as_they_are(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    good, bad = tmp_path / "good.rect", tmp_path / "bad.rect"
    good.write_text("let a=1")
    bad.write_text("let b = (1\n")
    assert run(good, bad, tmp_path / "none.rect") == 2
    captured = capsys.readouterr()
    assert captured.out == "" and "bad.rect:1:9: this ( is never closed" in captured.err
    assert "none.rect: there is no such file" in captured.err and captured.err.count("cure:") == 2
    assert good.read_text() == "let a=1" and bad.read_text() == "let b = (1\n"


@pytest.mark.parametrize("spoil", ["meaning", "comment", "second pass"])
def test_what_would_change_the_file_s_meaning_is_refused(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path, capsys: pytest.CaptureFixture[str], spoil: str
) -> None:
    """The check is made on every use: here the layout is broken on purpose."""
    real = layout._tidied
    broken = {
        "meaning": lambda text, description: real(text, description).replace("1000 uF", "1001 uF"),
        "comment": lambda text, description: real(text, description).replace("# the diode", ""),
        "second pass": lambda text, description: real(text, description) + "\n" * (1 + text.endswith("\n\n")),
    }
    monkeypatch.setattr(layout, "_tidied", broken[spoil])
    file = tmp_path / "messy.rect"
    file.write_text(MESSY)
    assert run(file) == 2
    assert "can't be tidied" in capsys.readouterr().err and file.read_text() == MESSY


def test_line_ends_rights_and_links_stay(tmp_path: Path) -> None:
    file, link = tmp_path / "real.rect", tmp_path / "link.rect"
    file.write_bytes(b"let a=1 # one\r\nlet bb=2\r\n")
    file.chmod(0o640)
    link.symlink_to(file)
    assert run(link) == 0
    assert file.read_bytes() == b"let a  = 1  # one\r\nlet bb = 2\r\n"
    assert link.is_symlink() and file.stat().st_mode & 0o777 == 0o640


def test_an_empty_file_and_one_of_comments_alone_stay(tmp_path: Path) -> None:
    for text in ("", "# nothing yet\n", "# twice\n# twice\n", "# one\n\n# two\n"):
        file = tmp_path / "empty.rect"
        file.write_text(text)
        assert run(file) == 0 and file.read_text() == text


@pytest.mark.parametrize(
    ("written", "tidied"),
    [
        ("let x=(2 V)^2", "let x = (2 V)^2\n"),
        ("let x=2 V^2", "let x = 2 V^2\n"),
        ("a->b[ k - 1 ]: resistor R[2*N], 1 Ohm", "a -> b[k-1]: resistor R[2*N], 1 Ohm\n"),
        ("let x = max(" + ", ".join(["12345.678 mOhm"] * 12) + ")", None),
        ('require s: mean(u) <= 1 V as "' + "many words, and more, " * 8 + '"', None),
    ],
)
def test_powers_of_units_indices_and_long_lines_keep_their_meaning(written: str, tidied: str | None) -> None:
    result, mistakes = tidy(written, "text")
    assert mistakes == [] and result is not None
    assert read_text(result, "")[0] == read_text(written, "")[0]
    if tidied is None:
        assert len(result.splitlines()) == (2 if "max" in written else 1)
        assert "max" not in written or max(map(len, result.splitlines())) <= layout.WIDTH
    else:
        assert result == tidied
