"""Chooses the winding and the reservoir of a supply before a 9 V linear regulator, and says how sure the choice is.

    python circuits/choose_reservoir.py

Of the candidates, those pass with which every requirement holds at every corner of mains and capacitor; the cheapest is
the one with the smallest winding, then the smallest reservoir. A spread over all tolerances then tells the yield, and
whether a snubber across the winding, against the ringing when diodes turn off, costs any of it.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import product

import simcore

WINDINGS = (12.0, 13.0, 14.0)
"""V, rms, with the full load."""
RESERVOIRS = (2200e-6, 3300e-6, 4700e-6, 6800e-6)
"""F, of the E6 series (IEC 60063)."""
MAINS, CAPACITOR = (0.9, 1.1), (0.8, 1.2)
"""Limits over the nominal value: of the mains as EN 50160 has them, of an electrolytic capacitor common practice."""
STUDIES = ("full_load", "light_load")
REQUIRED = (
    "require full_load:  valley(u_out) >= 11 V            as 'what the regulator needs above 9 V'",
    "require full_load:  ripple(u_out) <= 2 V",
    "require light_load: peak(u_out) <= 22 V              as 'what its input stands, with a margin'",
    "require full_load:  peak(current(each diode)) <= 6 A as 'repetitive peak of a 1 A diode'",
)
SNUBBER = ("ac1 -> snub: resistor R_snub, 100 Ohm", "snub -> ac2: capacitor C_snub, 100 nF")


def supply() -> simcore.Design:
    """The bench supply of the library with what this one must hold."""
    bench = simcore.read(simcore.library_folder() / "bench_supply.rect")
    old = [line for line in bench.text.splitlines() if line.startswith("require")]
    return bench.edited(*(line.replace("'", '"') for line in REQUIRED), without=old)


def chosen(
    design: simcore.Design, windings: Sequence[float], reservoirs: Sequence[float]
) -> tuple[float, float] | None:
    """The first candidate, in the order given, of which all corners pass."""
    candidates, corners = list(product(windings, reservoirs)), list(product(MAINS, CAPACITOR))
    variants = ({"V_sec": v * mains, "C_res": c * part} for v, c in candidates for mains, part in corners)
    table = design.sweep(variants, studies=STUDIES).table
    verdicts = [name for name, column in table.dtype.fields.items() if column[0].kind == "U" and name != "ended"]
    passes = (table["ended"] == "solved") & [all(row[name] == "holds" for name in verdicts) for row in table]
    for (winding, reservoir), passed in zip(candidates, passes.reshape(-1, len(corners)), strict=True):
        print(f"  {winding:4.0f} V, {reservoir * 1e6:5.0f} uF: {passed.sum()} of {len(corners)} corners pass")
        if passed.all():
            return winding, reservoir
    return None


def main(
    windings: Sequence[float] = WINDINGS, reservoirs: Sequence[float] = RESERVOIRS, samples: int = 200
) -> tuple[float, float] | None:
    """Choose, print the choice and its yield, and return it."""
    design = supply()
    choice = chosen(design, windings, reservoirs)
    if choice is None:
        print("No candidate passes at every corner.")
        return None
    final = design.variant(V_sec=f"{choice[0]} V", C_res=f"{choice[1]} F").edited(
        f"sweep spread: {samples} samples of V_sec, C_res, seed = 7"
    )
    results = final.sweep("spread", studies=STUDIES, others={"with a snubber": final.edited(*SNUBBER)})
    for rate in results.pass_rates:
        print(f"  {rate.at}: {rate.passing} of {rate.drawn} pass, at 95 % confidence {rate.low:.1%} to {rate.high:.1%}")
    for worst in results.worst:
        if worst.row is not None and worst.found is not None:
            margin = f"{worst.found.margin:.3g} {worst.claim.unit}"
            print(f"  {worst.claim.requirement}: {worst.found.state}, least margin {margin}")
    return choice


if __name__ == "__main__":
    main()
