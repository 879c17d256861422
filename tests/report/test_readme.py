"""The README says what is so: its reference, the output it shows, and its examples."""

from __future__ import annotations

import doctest
import math
import os
import re
import shlex
import shutil
import subprocess
import sys
from dataclasses import replace
from glob import glob
from itertools import zip_longest
from pathlib import Path

import pytest

import simcore
from simcore.command import main as run_command
from simcore.components import KINDS
from simcore.components.kind import Kind
from simcore.design.studies import STUDY_KEYS
from simcore.design.study_kinds import STUDY_KINDS
from simcore.figures.catalogue import FIGURES, SIGNALS
from simcore.report import reference as written
from simcore.report.reference import BEGIN, END, README, main, reference, with_reference

TEXT = README.read_text("utf-8")
NUMBER = re.compile(r"(?<![\w.])-?[0-9]+(?:\.[0-9]+)?(?:e[+-]?[0-9]+)?(?![\w.]*[A-Za-z(\[])(?: ([fpnumkMG]?)(V|A|W|J|s)\b)?")
PREFIX = {"": 1.0, "f": 1e-15, "p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "k": 1e3, "M": 1e6, "G": 1e9}


def indented(start: str) -> str:
    """The indented block of the README that starts with a line."""
    lines = TEXT.splitlines()
    first = lines.index(f"    {start}")
    block = []
    for line in lines[first:]:
        if line and not line.startswith("    "):
            break
        block.append(line[4:])
    return "\n".join(block).rstrip() + "\n"


# --- the reference -----------------------------------------------------------------------------------------------------------


def test_the_reference_is_that_of_the_declarations() -> None:
    assert with_reference(TEXT) == TEXT, "run python -m simcore.report.reference"


def test_the_reference_names_every_declaration() -> None:
    names = [name for kind in KINDS.values() for name in (kind.name, *kind.key)]
    names += [*STUDY_KEYS, *STUDY_KINDS, *SIGNALS, *FIGURES]
    text = reference()
    assert len(names) > 100
    assert [name for name in names if not re.search(rf"\b{name}\b", text)] == []


@pytest.mark.parametrize("lacking", ["kind", "key", "study key", "study", "figure", "signal"])
def test_nothing_is_declared_without_a_meaning(monkeypatch: pytest.MonkeyPatch, lacking: str) -> None:
    diode: Kind = KINDS["diode"]
    changes = {
        "kind": (KINDS, "diode", replace(diode, meaning=" ")),
        "key": (KINDS, "diode", replace(diode, keys=(*diode.keys[:-1], replace(diode.keys[-1], meaning="")))),
        "study key": (STUDY_KEYS, "last", replace(STUDY_KEYS["last"], meaning="")),
        "study": (STUDY_KINDS, "settled", replace(STUDY_KINDS["settled"], meaning="")),
        "figure": (FIGURES, "rms", replace(FIGURES["rms"], meaning="")),
        "signal": (SIGNALS, "power", replace(SIGNALS["power"], meaning="")),
    }
    reference()
    monkeypatch.setitem(*changes[lacking])
    with pytest.raises(ValueError, match="without a meaning"):
        reference()


def test_the_module_brings_a_readme_up_to_date(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setattr(written, "README", tmp_path / "README.md")
    assert main() == 2
    written.README.write_text(f"before\n{BEGIN}\nold\n{END}\nafter\n")
    assert main() == 0
    assert written.README.read_text("utf-8") == f"before\n{BEGIN}\n\n{reference()}\n\n{END}\nafter\n"
    with pytest.raises(ValueError, match="markers"):
        with_reference("no markers")


# --- what a run prints -------------------------------------------------------------------------------------------------------


def plain(line: str) -> str:
    """A line without its numbers and spacing; sure: what no machine changes, the units with it."""
    return re.sub(r"-{2,}", "--", re.sub(r"\s+", " ", NUMBER.sub(lambda match: f"# {match[2] or ''}", line)))


def values(line: str) -> list[float]:
    """The figures of a line, in SI units, without what follows ± or says what a run cost."""
    if re.match(r"\s*(±|energy|cost|settled|All)", line):
        return []
    kept = re.sub(r"± \S+ \S+", "", line)
    return [float(match[0].split()[0]) * PREFIX[match[1] or ""] for match in NUMBER.finditer(kept)]


def test_the_output_shown_is_that_of_a_run(tmp_path: Path) -> None:
    """Words and units to the letter; figures to a thousandth, since other machines round otherwise."""
    shutil.copytree(simcore.library_folder(), tmp_path / "circuits")
    command = [sys.executable, "-m", "simcore.command", "run", "circuits/bench_supply.rect"]
    environment = {**os.environ, "PYTHONPATH": str(README.parent)}
    done = subprocess.run(command, cwd=tmp_path, env=environment, capture_output=True, text=True, timeout=120, check=True)
    real = iter(done.stdout.splitlines())
    shown = indented("12 V bench supply: bridge with reservoir capacitor").splitlines()
    assert shown.count("...") == 1 and len(shown) > 30
    compared = 0
    for line in shown:
        if line in ("...", ""):
            continue
        found = next((other for other in real if plain(other) == plain(line)), None)
        assert found is not None, f"a run does not print: {line}"
        for expected, value in zip_longest(values(line), values(found)):
            assert math.isclose(expected, value, rel_tol=1e-3), (line, found)
            compared += 1
    assert compared > 60


# --- examples ----------------------------------------------------------------------------------------------------------------


def test_the_python_examples_run() -> None:
    result = doctest.testfile(str(README), module_relative=False, report=True)
    assert result.failed == 0 and result.attempted >= 20


def test_the_language_in_one_screen_holds_what_it_requires() -> None:
    proof = simcore.read_text(indented('purpose "5 V for a door bell"                        # one statement a line; a line goes on after a comma')).prove()
    assert proof.outcome.status == 0 and len(proof.verdicts) == 2


# --- the commands ------------------------------------------------------------------------------------------------------------

COMMAND = re.compile(r"\bbulkrail (?:run|sweep|look|size|keep|compare|draw|tidy) [^`\n]*\.rect[^`\n]*")
OPTIONS = re.compile(r"(?<![\w-])--[a-z]+")
EXPECTED = {
    "bulkrail run circuits/bench_supply.rect": 0,
    'bulkrail size circuits/bench_supply.rect --let C_res --for "full_load: ripple(u_out) <= 1 V"': 0,
    "bulkrail run supplies/*.rect --out build/supplies": 0,
    "bulkrail keep supplies/*.rect": 0,
    "bulkrail compare supplies/*.rect --junit build/drift.xml": 0,
}
"""Every command line that the README shows in full, with the exit status that it says or implies."""


def shown_commands() -> list[str]:
    """Those with a file of their own, each once, in order; `FILE` stands for any in the summary of the verbs."""
    return list(dict.fromkeys(match[0].strip() for match in COMMAND.finditer(TEXT)))


def test_every_command_line_is_known() -> None:
    assert shown_commands() == list(EXPECTED)


def test_the_commands_end_as_stated(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """In order, on a copy of the circuits, as a user would; the supplies are two of them."""
    shutil.copytree(simcore.library_folder(), tmp_path / "circuits")
    (tmp_path / "supplies").mkdir()
    for stem in ("half_wave", "doubler_half_wave"):
        shutil.copy(tmp_path / "circuits" / f"{stem}.rect", tmp_path / "supplies")
    monkeypatch.chdir(tmp_path)
    for line, status in EXPECTED.items():
        words = shlex.split(line)[1:]
        arguments = [name for word in words for name in (sorted(glob(word)) if "*" in word else [word])]
        found = run_command(arguments)
        said = capsys.readouterr()
        assert found == status, (line, said.out[-500:], said.err)
    for written_by in ("results/bench_supply/summary.json", "results/bench_supply/size.csv", "build/drift.xml"):
        assert (tmp_path / written_by).is_file(), written_by
    assert (tmp_path / "build/supplies/half_wave/summary.json").is_file()
    assert (tmp_path / "supplies/half_wave.kept.csv").is_file()


def test_the_files_of_a_run_are_those_of_the_table(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    path = simcore.library_folder() / "half_wave.rect"
    assert run_command(["run", str(path), "--bill"]) == 0
    named = re.findall(r"^\| `([a-z<>]+\.(?:csv|json))` \|", TEXT, re.M)
    studies = simcore.read(path).studies
    expected = {name.replace("<study>", study) for name in named for study in studies}
    assert {each.name for each in (tmp_path / "results" / "half_wave").iterdir()} == expected and len(named) == 5


@pytest.mark.parametrize("verb", ["run", "sweep", "look", "size", "keep", "compare", "draw", "tidy"])
def test_the_options_shown_are_those_of_the_verb(verb: str, capsys: pytest.CaptureFixture[str]) -> None:
    """The summary of the verbs, with what stands below it, and `--help` agree."""
    with pytest.raises(SystemExit):
        run_command([verb, "--help"])
    offered = set(OPTIONS.findall(capsys.readouterr().out)) - {"--help"}
    summary = indented(next(line[4:] for line in TEXT.splitlines() if line.startswith("    bulkrail run FILE...")))
    lines = re.split(r"^bulkrail ", summary, flags=re.M)
    named = {name for line in lines if line.startswith(f"{verb} ") for name in OPTIONS.findall(line)}
    if verb == "sweep":
        named |= set(re.findall(r"^    (--[a-z]+)", TEXT, re.M))
    assert named <= offered and offered - named <= {"--set", "--out", "--study"}, (named, offered)


def test_every_worked_circuit_is_in_the_table() -> None:
    table = TEXT.partition("## Worked circuits")[2].partition("\n## ")[0]
    named = sorted(re.findall(r"`(\w+)\.rect`", table))
    assert named == sorted(path.stem for path in simcore.library_folder().glob("*.rect"))
