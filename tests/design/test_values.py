"""Names and values of a design: lets, tolerances, data sheets, keys, used files, and what is replaced from outside."""

from __future__ import annotations

from pathlib import Path

import pytest
from understood import BASE, circuit_of, understood, whats

from grammar.mistakes import DescriptionError
from grammar.quantities import OHM, VOLT, Quantity
from grammar.reader import read_expression
from simcore.design.elaborate import elaborate
from simcore.design.files import MOST_TEXT, load, load_text


@pytest.mark.parametrize(
    ("written", "low", "high", "distribution"),
    [
        ("10 Ohm tolerance 20 %", 8.0, 12.0, "uniform"),
        ("10 Ohm tolerance -10 % .. +50 %", 9.0, 15.0, "uniform"),
        ("10 Ohm tolerance 0.5 Ohm normal", 9.5, 10.5, "normal"),
        ("10 Ohm tolerance 9 Ohm .. 14 Ohm triangular", 9.0, 14.0, "triangular"),
        ("-10 V tolerance 20 %", -12.0, -8.0, "uniform"),
        ("25 degC tolerance -10 degC .. 50 degC", 263.15, 323.15, "uniform"),
        ("25 degC tolerance 10 K", 288.15, 308.15, "uniform"),
        ("1 tolerance 0.9 .. 1.1", 0.9, 1.1, "uniform"),
        ("4 tolerance 10 %", 3.6, 4.4, "uniform"),
        ("10 Ohm tolerance 0.1", 9.0, 11.0, "uniform"),
    ],
)
def test_tolerances(written: str, low: float, high: float, distribution: str) -> None:
    let = circuit_of(BASE + f"let q = {written}\n").lets["q"]
    assert (let.low, let.high) == pytest.approx((low, high)) and let.distribution == distribution


def test_lets_in_any_order_however_long_the_chain() -> None:
    count = 3000
    lines = [f"let x{n} = x{n + 1} + 1 Ohm" for n in range(count)]
    circuit = circuit_of(BASE + "\n".join([*lines, f"let x{count} = 1 Ohm", "p -> b: resistor Q, x0"]) + "\n")
    assert circuit.elements["Q"].given["resistance"] == count + 1


def test_a_chain_of_lets_in_a_repeat_and_by_index() -> None:
    circuit = circuit_of(
        BASE
        + "p -> b: resistor Q, r[2000 * one]\nlet one = 1\nlet r[0] = 1 Ohm\nrepeat k from 1 to 2000 { let r[k] = r[k - one] + 1 Ohm }\n"
    )
    assert circuit.elements["Q"].given["resistance"] == 2001.0


def test_a_tree_of_lets_is_walked_once() -> None:
    """Each let twice in the next one: 2^90 paths from the temperature of the diode to the let at the root."""
    chain = "let x0 = 600 K\n" + "".join(f"let x{n + 1} = x{n} / 2 + x{n} / 2\n" for n in range(90))
    assert (
        whats(
            BASE + chain + "a -> p: diode D2, saturation_current = 1 nA, ideality_factor = 2, temperature = x90 / 2\n"
        )
        == []
    )


@pytest.mark.parametrize(
    ("added", "what"),
    [
        ("let q = q", "q depends on itself"),
        ("let q = r\nlet r = q + 1", "q depends on itself"),
        ("let q[1] = q[1]", "q[1] depends on itself"),
        ("let q = u\nobserve u = voltage(p)", "u is an observed signal, not a value"),
        ("let q = d\ndatasheet d: diode { saturation_current = 1 nA, ideality_factor = 2 }\nlet r = 2 * d", "d is a data sheet, not a value"),
        ("let q = zz", "nothing is named zz"),
        ("let q = 1\nlet q = 2", "q is declared twice"),
        ("let q.r = 1", "q.r can't be declared from outside"),
        ("datasheet d: diode { saturation_current = 1 nA, ideality_factor = 2 }\nlet d = 1", "d is a data sheet already"),
        ("datasheet d: diode { bandgap = 1 V }\ndatasheet d: diode { bandgap = 1 V }", "d is a data sheet already"),
        ("datasheet d: dode { bandgap = 1 V }", "there is no kind dode"),
        ("datasheet d: diode { bandgp = 1 V }", "a diode has no key bandgp"),
        ("datasheet d: diode { bandgap = 1 V, bandgap = 1 V }", "bandgap is given twice"),
        ("let q = 1 Ohm tolerance 1 V", "the tolerance of q is in another unit than its value"),
        ("let q = 1 Ohm tolerance 2 Ohm .. 3 Ohm", "the value of q does not lie within its tolerance"),
        ("let q = d tolerance 1 %\ndatasheet d: diode { saturation_current = 1 nA, ideality_factor = 2 }", "q is a data sheet, which has no tolerance"),
        ("ambient 40 V", "the ambient temperature is given in V"),
        ("ambient -300 degC", "the ambient temperature is below absolute zero"),
        ("ambient 40 degC\nambient 50 degC", "the ambient temperature is given twice"),
        ('purpose "a"\npurpose "b"', "the purpose is given twice"),
        ("p -> b: resistor Q", "resistor Q has no resistance"),
        ("p -> b: resistor Q, 1 V", "resistance is given in V"),
        ("p -> b: resistor Q, 5", "resistance has no unit"),
        ("p -> b: resistor Q, -1 Ohm", "resistance is -1 Ohm, which it can't be"),
        ("p -> b: resistor Q, 1 Ohm, resistance = 1 Ohm", "resistance is given twice"),
        ("p -> b: resistor Q, D1", "nothing is named D1"),
        ("p -> b: resistor Q, resistance = 1 : 2", "resistance takes one value"),
        ("p -> b: capacitor Q, 1 F, rated_ripple_current = 1 A : 1 A", "rated_ripple_current takes a point of the curve"),
        ("p -> b: capacitor Q, 1 F, rated_ripple_current = 1 A @ 1 s", "what stands behind @ in rated_ripple_current is given in s"),
        ("p -> b: switch Q, initially = ajar, closes_at = 1 s", "initially is none of the words it can be"),
        ("p -> b: source Q, points = [1 V], series_resistance = 1 Ohm", "points takes a list of another form"),
        ("p -> b: source Q, sine = 1 V, frequency = 1 Hz, series_resistance = 1 Ohm", "the amplitude does not say whether it is rms or peak"),
        ("p -> b: source Q, constant = 1 V, points = [0 s: 1 A], series_resistance = 1 Ohm", "source Q is given in V and in A"),
        ("p -> b: diode Q, diod\ndatasheet diode1: diode { saturation_current = 1 nA, ideality_factor = 2 }", "nothing is named diod"),
        ("p -> b: capacitor Q, d\ndatasheet d: diode { saturation_current = 1 nA, ideality_factor = 2 }", "d is a data sheet of a diode, not of a capacitor"),
        ("p -> b: diode Q, saturation_current = 1 nA, ideality_factor = 2, in_series = 1.5", "in_series is 1.5, which it can't be"),
        ("p -> b: transformer Q, turns = 1 : 1", "a transformer goes between other terminals"),
        ("(p -> b) : (a -> b): resistor Q, 1 Ohm", "a resistor goes between other terminals"),
        ("(p -> b) : (a -> b): transformer Q, turns = 1 : 1 : 1, magnetising = 1 H, resistance = 1 Ohm : 1 Ohm", "turns has 3 values for 2 windings"),
        ("p -> b: resistor R1, 1 Ohm", "R1 is named twice"),
        ("p -> R1: resistor Q, 1 Ohm", "R1 is an element and a node"),
        ("reference zz", "no node is named zz"),
        ("reference b", "b is the reference twice"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_names_and_values(added: str, what: str) -> None:
    assert whats(BASE + added + "\n") == [what]


def test_overrides_replace_lets_and_sheets() -> None:
    text = (
        BASE
        + "let q = 1 Ohm\nlet m = small\np -> b: resistor Q, 2 * q\na -> p: diode D2, m\n"
        + "".join(
            f"datasheet {name}: diode {{ saturation_current = {current} nA, ideality_factor = 2 }}\n"
            for name, current in (("small", 1), ("big", 5))
        )
    )
    project, circuit, mistakes = understood(text)
    assert not mistakes and circuit.elements["Q"].given["resistance"] == 2.0 and circuit.lets["m"].value == "small"
    expression, _ = read_expression("3 Ohm + q0", "set")
    plain, _ = read_expression("3 Ohm", "set")
    assert expression is not None and plain is not None
    for value, expected in ((Quantity(5.0, OHM), 10.0), (plain, 6.0)):
        changed, mistakes = elaborate(project, {"q": value, "m": "big"})
        assert not mistakes and changed.elements["Q"].given["resistance"] == expected
        assert changed.elements["D2"].given["saturation_current"] == 5e-9 and changed.lets["m"].value == "big"
    assert [mistake.what for mistake in elaborate(project, {"m": "bigg"})[1]] == ["no data sheet is named bigg"]
    assert [mistake.what for mistake in elaborate(project, {"q": Quantity(1.0, VOLT)})[1]] == [
        "resistance is given in V"
    ]
    with pytest.raises(DescriptionError):
        _ = load_design(text).variant(q="1 V").circuit


def load_design(text: str):
    import simcore

    return simcore.read_text(text, "x")


# --- files ---------------------------------------------------------------------------------------------------------

SHEET = "let I = 2 nA\ndatasheet d: diode { saturation_current = I, ideality_factor = 2 }\n"


def files(folder: Path, **texts: str) -> list[str]:
    """What is wrong with top.rect, beside other files whose names have __ for a slash."""
    for name, text in texts.items():
        path = folder / (name.replace("__", "/") + ".rect")
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, "utf-8")
    project, mistakes = load(folder / "top.rect")
    circuit, more = elaborate(project)
    if not mistakes and not more:
        assert circuit.elements["D2"].given["saturation_current"] == 2e-9
    return [mistake.what for mistake in mistakes + more]


USES = BASE + "a -> p: diode D2, d\n"


def test_a_used_file_sees_its_own_lets_and_the_using_one_does_not(tmp_path: Path) -> None:
    assert files(tmp_path, top='use "parts/sheet.rect"\nlet I = 1 A\n' + USES, parts__sheet=SHEET) == []
    assert files(tmp_path, top='use "parts/sheet.rect"\np -> b: resistor Q, I / 1 A * 1 Ohm\n' + USES) == [
        "nothing is named I"
    ]


def test_what_a_used_file_uses_is_not_brought_in(tmp_path: Path) -> None:
    assert files(tmp_path, top='use "a.rect"\n' + USES, a='use "b.rect"\n', b=SHEET) == ["nothing is named d"]


@pytest.mark.parametrize("path", ["../outside.rect", "sub/../../outside.rect", "link.rect", "linked/outside.rect"])
def test_nothing_above_the_top_files_folder_is_read(tmp_path: Path, path: str) -> None:
    (tmp_path / "outside.rect").write_text(SHEET)
    inside = tmp_path / "inside"
    (inside / "sub").mkdir(parents=True)
    (inside / "link.rect").symlink_to(tmp_path / "outside.rect")
    (inside / "linked").symlink_to(tmp_path)
    assert files(inside, top=f'use "{path}"\n' + USES) == [f'"{path}" lies outside the top file\'s folder']


@pytest.mark.parametrize(
    ("path", "what"),
    [
        ("/etc/passwd", '"/etc/passwd" is no relative path'),
        ("sub\\\\d.rect", '"sub\\\\d.rect" is no relative path'),
        ("nothing.rect", 'there is no file "nothing.rect"'),
        (".", 'there is no file "."'),
        ("", 'there is no file ""'),
        ("x" * 3000, f'there is no file "{"x" * 3000}"'),
        ("round.rect", 'there is no file "round.rect"'),
        ("top.rect", "the files use each other in a circle"),
    ],
)
def test_paths_that_bring_in_nothing(tmp_path: Path, path: str, what: str) -> None:
    (tmp_path / "round.rect").symlink_to(tmp_path / "round.rect")
    assert files(tmp_path, top=f'use "{path}"\n' + USES) == [what]


def test_circles_and_chains_of_files(tmp_path: Path) -> None:
    assert files(tmp_path, top='use "a.rect"\n' + USES, a='use "b.rect"\n' + SHEET, b='use "a.rect"\n') == [
        "the files use each other in a circle"
    ]
    chain = {f"c{n}": f'use "c{n + 1}.rect"\n' for n in range(20)}
    assert files(tmp_path, top='use "c0.rect"\n' + USES, **chain) == ["too many files use one another"]


def test_files_too_large_together(tmp_path: Path) -> None:
    big = "#" * 9000 + "\n"
    parts = {f"f{n}": big * 20 for n in range(MOST_TEXT // (20 * len(big)) + 1)}
    assert files(tmp_path, top="".join(f'use "{name}.rect"\n' for name in parts) + USES, **parts) == [
        "the files of the design are too large together"
    ]


def test_a_used_file_that_is_no_text(tmp_path: Path) -> None:
    (tmp_path / "d.rect").write_bytes(b"\xff\xfe")
    assert files(tmp_path, top='use "d.rect"\n' + USES) == ["the file is not UTF-8 text"]


def test_a_mistake_in_a_used_file_is_shown_there(tmp_path: Path) -> None:
    assert files(
        tmp_path,
        top='use "d.rect"\n' + USES,
        d="datasheet d: diode { saturation_current = 1 V, ideality_factor = 2 }\n",
    ) == ["saturation_current is given in V"]
    assert files(tmp_path, top='use "d.rect"\n' + USES, d="datasheet d: diode { saturation_current = 1 Vs }\n") == [
        "Vs is no unit"
    ]


def test_a_text_without_a_folder_finds_the_library_only() -> None:
    _, mistakes = load_text('use "parts/diodes.rect"\nuse "top.rect"\n', "text")
    assert [mistake.what for mistake in mistakes] == ['there is no file "top.rect"']
