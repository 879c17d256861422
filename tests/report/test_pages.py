"""What a run hands on: the HTML page, pictures as SVG, test reports for build servers."""

import math
import re
from html.parser import HTMLParser
from pathlib import Path
from xml.etree import ElementTree

import numpy as np
import pytest

import simcore
from simcore.face import Design
from simcore.proof import Proof
from simcore.report.junit import Case, Suite, verdict_case, write_junit
from simcore.report.page import page
from simcore.report.panels import any_conducts, bars_of, decades, picture_of, ticks
from simcore.report.svg import bars_svg, picture_svg, placed
from simcore.report.traces import traces

TEXT = """
purpose "<script>alert(1)</script> & more"
a -> b: source mains, sine = 12 V rms, frequency = 50 Hz, series_resistance = 1 Ohm
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8, rated_mean_current = 1 A
p -> b: capacitor C1, 1000 uF                                           # <b>a comment</b>
p -> b: resistor R1, 100 Ohm
reference b
observe u = voltage(p) as "out & <i>up</i>"
observe i = current(D1)
study s: settled
study t: transient, duration = 100 ms, last = 1
study rest: operating_point
require s: ratings
require s: mean(u) >= 100 V as "<u>never</u>"
require s: harmonics(mains) within "IEC 61000-3-2 class A"
"""


@pytest.fixture(scope="module")
def design() -> Design:
    return simcore.read_text(TEXT, "d.rect")


@pytest.fixture(scope="module")
def proof(design: Design) -> Proof:
    return design.prove()


class Checker(HTMLParser):
    """Counts tags, and holds every one to be closed where it has to be."""

    VOID = ("meta", "br")

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.seen: list[str] = []
        self.references: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.seen.append(tag)
        self.references += [value or "" for name, value in attrs if name in ("src", "href", "action", "data")]
        self.references += [name for name, _ in attrs if name.startswith("on")]
        if tag not in self.VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.seen.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag


def test_the_page_stands_alone_and_escapes_what_the_user_wrote(design: Design, proof: Proof) -> None:
    text = page(proof, design.project)
    checker = Checker()
    checker.feed(text)
    checker.close()
    assert checker.open == [] and checker.references == []
    assert not {"script", "b", "i", "u", "link", "img", "iframe"} & set(checker.seen)
    assert "http://" not in text.replace("http://www.w3.org/2000/svg", "") and "https://" not in text
    assert "default-src 'none'" in text and "&lt;script&gt;alert(1)&lt;/script&gt; &amp; more" in text


def test_the_page_holds_all_of_the_report(design: Design, proof: Proof) -> None:
    text = page(proof, design.project)
    for part in (
        "What was required and found",
        "How sure this is",
        "The circuit",
        "capacitor",
        "Ratings",
        "Cautions",
        "The description",
        "licensed practice",
        simcore.__version__,
        "a comment",
        "D1: mean current (rated 1 A)",
        "order 4 decides",
        "edition of the standard",
        "peak current",
        "± ",
    ):
        assert part in text, part
    assert text.count("<svg") == 4
    assert page(proof, design.project) == text


def test_pictures_are_well_formed_and_show_each_signal(proof: Proof) -> None:
    found = {name: picture_of(name, study) for name, study in proof.studies.items()}
    assert found["rest"] is None
    for name in ("s", "t"):
        picture = found[name]
        assert picture is not None
        root = ElementTree.fromstring(picture_svg(picture))
        words = [node.text for node in root.iter("{http://www.w3.org/2000/svg}text")]
        for wanted in ("u", "i", "D1", "voltage in V", "current in A", "time in ms"):
            assert wanted in words, wanted
        assert ("judged" in words) == (name == "t")
        assert len(list(root.iter("{http://www.w3.org/2000/svg}polyline"))) == 2


def test_a_curve_keeps_its_extremes_in_the_unit_of_its_axis(proof: Proof) -> None:
    picture = picture_of("t", proof.studies["t"])
    assert picture is not None
    times, values = picture.panels[1].curves[0].times, picture.panels[1].curves[0].values
    record = proof.studies["t"].record
    assert values.max() == pytest.approx(record.current("D1").highest(), rel=1e-3)
    assert (times[0], times[-1]) == (0.0, pytest.approx(100.0)) and np.all(np.diff(times) >= 0.0)
    assert len(times) <= 2000
    spans = picture.conduction["D1"]
    assert len(spans) == 5 and np.all(spans[:, 1] > spans[:, 0])
    share = record.current("D1").time_above(1e-3 * record.current("D1").highest()) * 1e3
    assert np.sum(np.diff(spans)) == pytest.approx(share)


def test_a_curve_of_few_points_bends_between_them(proof: Proof) -> None:
    """As the solution does, and through all that was sampled of it."""
    study = proof.studies["s"]
    picture = picture_of("s", study)
    assert picture is not None
    curve, signal = picture.panels[0].curves[0], study.record.between("p")
    sampled = traces({"u": signal})
    assert len(curve.times) == 4 * (len(sampled.times) - 1) + 1
    assert np.array_equal(curve.values[::4], sampled.columns["u [V]"])
    rough = np.zeros(len(curve.times), dtype=bool)
    for start, end in signal.rough:
        rough |= (curve.times * 1e-3 >= start - 1e-9) & (curve.times * 1e-3 <= end + 1e-9)
    assert np.mean(~rough) > 0.5
    assert np.allclose(curve.values[~rough], signal.value(curve.times * 1e-3)[~rough], rtol=0.0, atol=1e-9)


def test_bars_show_each_order_beside_its_limit(proof: Proof) -> None:
    (bars,) = bars_of(proof)
    assert len(bars.rows) == 39
    root = ElementTree.fromstring(bars_svg(bars))
    assert len(list(root.iter("{http://www.w3.org/2000/svg}rect"))) == 40
    low, high = decades(bars.rows)
    assert 10.0**low < 0.046 and 10.0**high > 2.3


def test_ticks_are_round_and_within() -> None:
    for low, high in ((0.0, 20.0), (-17.3, 16.9), (4161.9, 4163.2), (1e-9, 3e-9), (-1e5, -9e4)):
        found = ticks(low, high)
        assert 2 <= len(found) <= 7
        assert all(low - 1e-9 * abs(low) <= tick <= high + 1e-9 * abs(high) for tick in found)
        steps = np.diff(found)
        assert np.allclose(steps, steps[0])
        mantissa = steps[0] / 10.0 ** math.floor(math.log10(steps[0] * (1.0 + 1e-9)))
        assert min(abs(mantissa - good) for good in (1.0, 2.0, 2.5, 5.0, 10.0)) < 1e-6


def test_labels_are_moved_apart() -> None:
    found = placed([10.0, 11.0, 50.0, 10.5], [12.0] * 4, (0.0, 200.0))
    assert sorted(np.diff(sorted(found)) >= 12.0 - 1e-9) == [True, True, True]
    assert found[0] == 10.0 and found[2] == 50.0
    # What needs more room moves up from the end, and its neighbour with it.
    assert placed([90.0, 95.0], [12.0, 40.0], (0.0, 100.0)) == [48.0, 60.0]


def test_figures_of_a_settled_period_are_marked(proof: Proof) -> None:
    """At the figures' own values, and only where curves are few and a period is judged."""
    study = proof.studies["s"]
    picture = picture_of("s", study)
    assert picture is not None
    (volts,), (amperes,) = picture.panels[0].curves, picture.panels[1].curves
    assert volts.noted is not None and amperes.noted is not None
    rows = {row.name: row.figures for row in study.signals}
    assert volts.noted.mean == rows["u"]["mean"].value
    assert [value for _, value in volts.noted.points] == [rows["u"]["peak"].value, rows["u"]["valley"].value]
    for time, value in volts.noted.points:
        assert value == pytest.approx(float(np.interp(time, volts.times, volts.values)), rel=1e-3)
    assert [words.split()[0] for words in amperes.noted.words] == ["mean", "rms", "peak", "valley", "ripple"]
    root = ElementTree.fromstring(picture_svg(picture))
    words = [node.text for node in root.iter("{http://www.w3.org/2000/svg}text")]
    assert set(volts.noted.words) <= set(words)
    assert len(list(root.iter("{http://www.w3.org/2000/svg}circle"))) == 4


def test_spans_that_meet_are_joined() -> None:
    spans = {"D1": np.array([[0.0, 1.0], [5.0, 6.0]]), "D2": np.array([[1.0, 2.0], [5.5, 7.0]])}
    assert any_conducts(spans) == [(0.0, 2.0), (5.0, 7.0)]


def test_a_test_report_counts_what_fails(tmp_path: Path, proof: Proof) -> None:
    cases = [verdict_case(verdict) for verdict in proof.verdicts]
    path = tmp_path / "new" / "junit.xml"
    write_junit(path, [Suite("d & <d>.rect", cases, "", 1.5), Suite("e.rect", [], "no\x00 solution\x1b")])
    first, second = ElementTree.parse(path).getroot()
    assert first.attrib["name"] == "d & <d>.rect" and first.attrib["time"] == "1.500"
    assert (first.attrib["tests"], first.attrib["failures"], first.attrib["errors"]) == (str(len(cases)), "1", "0")
    assert (second.attrib["tests"], second.attrib["errors"]) == ("1", "1")
    failure = first.find("testcase/failure")
    assert failure is not None and failure.attrib["message"] == "fails" and "required >= 100 V" in (failure.text or "")
    names = [case.attrib["name"] for case in first]
    assert "<u>never</u>" in names and "D1: mean current (rated 1 A)" in names


def test_a_case_that_holds_has_no_failure(tmp_path: Path) -> None:
    write_junit(tmp_path / "j.xml", [Suite("d", [Case("s", "a", "", "fine"), Case("s", "b", "drifted", "moved")])])
    text = (tmp_path / "j.xml").read_text()
    assert re.search(r'name="a">\s*<system-out>fine', text) and re.search(
        r'name="b">\s*<failure message="drifted">moved', text
    )


def test_drawn_pictures(proof: Proof) -> None:
    pytest.importorskip("matplotlib", reason="the extra `view` is not installed")
    from simcore.report.drawing import bars_bytes, picture_bytes

    picture = picture_of("s", proof.studies["s"])
    (bars,) = bars_of(proof)
    assert picture is not None
    assert picture_bytes(picture, "png").startswith(b"\x89PNG")
    drawn, bars_drawn = picture_bytes(picture, "svg"), bars_bytes(bars, "svg")
    assert drawn == picture_bytes(picture, "svg")
    for content, wanted in ((drawn, "voltage in V"), (bars_drawn, "current in A rms")):
        assert wanted in "".join(ElementTree.fromstring(content).itertext())
