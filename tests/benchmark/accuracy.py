"""What accuracy costs and whether it holds: figures of the settled bridge, against hand-written equations."""

from __future__ import annotations

import time

import numpy as np

import simcore
from simcore.report.tables import table
from tests.benchmark.circuits import Bridge
from tests.benchmark.equations import BridgeEquations

ASKED = ("1 %", "0.1 %", "0.01 %", "0.001 %")
FIGURES = ("mean(u_out)", "ripple(u_out)", "peak(current(D1))")
_TOLERANCE = 1e-10
_PERIODS = 12
_SAMPLES = 20_001


def _exact(spec: Bridge) -> dict[str, float]:
    """The figures from the hand-written equations, followed until settled; the mean is an integral that is carried along."""
    from scipy.integrate import solve_ivp

    equations = BridgeEquations(spec)
    period = 1.0 / spec.frequency

    def rates(now: float, states: np.ndarray) -> list[float]:
        return [*equations.rates(now, states), float(states[0])]

    options = {"method": "LSODA", "rtol": _TOLERANCE, "atol": _TOLERANCE, "max_step": period / 400.0}
    before = solve_ivp(rates, (0.0, _PERIODS * period), [spec.crest, 0.0], **options).y[0, -1]
    times = np.linspace(0.0, period, _SAMPLES)
    found = solve_ivp(rates, (0.0, period), [before, 0.0], t_eval=times, **options)
    voltage = found.y[0]
    currents = [equations.diode_current(now, v) for now, v in zip(times, voltage, strict=True)]
    return dict(zip(FIGURES, (found.y[1, -1] / period, np.ptp(voltage), max(currents)), strict=True))


def tables() -> list[str]:
    """The lines of this part."""
    spec = Bridge()
    exact = _exact(spec)
    rows, costs = [], []
    for asked in ASKED:
        design = simcore.read_text(spec.text + f"study s: settled, accuracy = {asked}\n", "benchmark")
        start = time.process_time()
        result = design.run("s")
        seconds = time.process_time() - start
        counts = result.solved.statistics
        names = ("solutions", "steps", "solves", "iterations", "periods", "periods with derivatives")
        costs.append([asked, f"{seconds:.2f}", *(f"{counts[name]:.0f}" for name in names)])
        for name in FIGURES:
            figure = result.figure(name)
            error = abs(float(figure) - exact[name])
            relative = f"{error / abs(exact[name]):.1e}"
            covered = "yes" if error <= figure.bound else "no"
            rows.append([asked, name, str(figure), f"{error:.1e} {figure.unit}", relative, covered])
    headings = ["accuracy", "figure", "found ± bound", "true error", "of it", "bound covers"]
    lines = [
        "The settled bridge's figures without a requirement on them, by the accuracy asked for",
        *table(headings, rows, left=2),
    ]
    headings = ["accuracy", "s", "solutions", "steps", "solves", "iterations", "periods", "with derivatives"]
    return [
        *lines,
        "",
        "What it cost, all solutions together: CPU time and counts",
        *table(headings, costs),
    ]
