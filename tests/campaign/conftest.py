"""The small design, read once."""

from __future__ import annotations

import pytest
from small_design import DESIGN

import simcore
from simcore.campaign.face import sweep_task
from simcore.campaign.solver import Task


@pytest.fixture(scope="session")
def design() -> simcore.Design:
    return simcore.read_text(DESIGN, "small.rect")


@pytest.fixture
def spread(design: simcore.Design) -> Task:
    return sweep_task(design._opened, "spread", (), ())
