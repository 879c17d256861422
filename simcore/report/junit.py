"""Verdicts as a test report that build servers read: the JUnit XML form, which is common practice and no standard.

Knows cases with an outcome; works nothing out.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from xml.etree.ElementTree import Element, SubElement, indent, tostring

from simcore.judge.outcome import State
from simcore.judge.verdict import Verdict
from simcore.report import words
from simcore.report.writing import whole_file

_FORBIDDEN = re.compile("[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
"""Characters that no XML document may hold."""


@dataclass(frozen=True)
class Case:
    """One thing that was tested; group: what it belongs to; failure: why it did not hold, "" where it did; text: what
    there is to read of it."""

    group: str
    name: str
    failure: str
    text: str


@dataclass(frozen=True)
class Suite:
    """The cases of one description; error: why it came to no verdict at all, "" where it did; seconds: what it took."""

    name: str
    cases: Sequence[Case]
    error: str = ""
    seconds: float = 0.0


def verdict_case(verdict: Verdict) -> Case:
    """A verdict as a case: whatever does not hold is a failure."""
    _, study, subject, required, found, margin = words.verdict_cells(verdict)
    text = f"required {required}, found {found}, margin {margin}"
    if verdict.reason:
        text += f"; {verdict.reason}"
    return Case(study, subject, "" if verdict.state is State.HOLDS else str(verdict.state), text)


def write_junit(path: Path, suites: Sequence[Suite]) -> None:
    """Write the report of several descriptions as one file."""
    root = Element("testsuites")
    for suite in suites:
        _add(root, suite)
    indent(root)
    with whole_file(path) as file:
        file.write('<?xml version="1.0" encoding="UTF-8"?>\n')
        file.write(tostring(root, encoding="unicode") + "\n")


def _add(root: Element, suite: Suite) -> None:
    errors = 1 if suite.error else 0
    counts = {
        "name": _clean(suite.name),
        "tests": str(len(suite.cases) + errors),
        "failures": str(sum(bool(case.failure) for case in suite.cases)),
        "errors": str(errors),
        "time": f"{suite.seconds:.3f}",
    }
    node = SubElement(root, "testsuite", counts)
    for case in suite.cases:
        entry = SubElement(node, "testcase", {"classname": _clean(case.group), "name": _clean(case.name)})
        if case.failure:
            SubElement(entry, "failure", {"message": _clean(case.failure)}).text = _clean(case.text)
        else:
            SubElement(entry, "system-out").text = _clean(case.text)
    if suite.error:
        entry = SubElement(node, "testcase", {"classname": _clean(suite.name), "name": "solved"})
        SubElement(entry, "error", {"message": _clean(suite.error)})


def _clean(text: str) -> str:
    return _FORBIDDEN.sub("\ufffd", text)
