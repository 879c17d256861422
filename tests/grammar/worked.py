"""Whole descriptions, each in another corner of the language, for tests of reading and writing."""

from __future__ import annotations

UNIVERSAL_INPUT = """purpose "Front end for 100 V to 240 V mains"
use "parts/diodes.rect"
let V_in = 230 V    tolerance 90 V .. 264 V
let C_bulk = 150 uF tolerance 20 %  normal
let T_room = 25 degC  tolerance -10 degC .. 50 degC   as "room"
reference minus
ambient T_room
line -> neutral: source mains, sine = V_in rms, frequency = 50 Hz,
                 series_resistance = 0.4 Ohm, series_inductance = 200 uH   # of the house
line -> l1: fuse F1, glass_slow
l1 -> l2: inrush_limiter NTC, cold_resistance = 10 Ohm, sensitivity = 2800 K, dissipation = 15 mW/K,
          heat_capacity = 300 mJ/K
l2 -> neutral: resistor R_x, 1 MOhm      as "discharges the input"
l2 -> plus: diode D1, silicon_1A
plus -> minus: load conv, power = [0 s: 0 W, 10 ms: 90 W], cut_in = 90 V, cut_out = 75 V
observe u_bulk = voltage(plus -> minus)
study low: settled, set V_in = 90 V, set T_room = -10 degC
study cold: transient, duration = 300 ms, angle = worst for -peak(current(mains)), last = 4
study dip: transient, after = low, duration = 200 ms {
    at 5 ms:  open mains
    at 25 ms: close mains
}
require low, dip: ratings, margin = 10 %
require cold: i2t(F1) <= 6 A^2 s    as "fuse survives"
require dip: time_until_below(abs(voltage(C_x)), 60 V) <= 2 s
require low: harmonics(mains) within "IEC 61000-3-2 class A"
require each study: peak(u_bulk) <= 400 V
"""

TWELVE_PULSE = """let x = 60 uH tolerance 10 %
reference minus, N
(L1, L2, L3) -> N: three_phase grid, sine = 400 V line rms, frequency = 50 Hz, short_circuit_power = 10 MVA, reactance_ratio = 7
(m1, m2, m3): three_phase other, sine = 230 V : 231 V : 229 V phase rms, frequency = 50 Hz, sequence = negative, unbalance = 1 : 0.95 : 1
(L1 -> N) : (y1 -> y0) : (d1 -> d2): transformer T1, turns = 400 : 400 : 692.8, magnetising = 2 H, leakage = 50 uH : x : 3 * x
block six(a, b, c, plus, minus) with valve {
    a -> plus: diode D1, valve
    minus -> a: diode D4, valve
}
(y1, y2, y3, plus_y, minus): six star, valve = disc
(plus_y -> plus) : (plus -> plus_d): transformer interphase, turns = 1 : 1
observe i = current(star.D1) + current(star.D3)
study lost: settled, open T1.w3
require lost: harmonic(current(grid.L1), 5) / harmonic(current(grid.L1), 1) <= 1 %
require lost: abs(mean(current(interphase.w1)) + mean(current(interphase.w2))) <= 10 A
require each study: ratings of star.D1, delta.D1, margin = 20 %
sweep leak: x over [50 uH, 70 uH] by R from 0.4 Ohm to 8 Ohm in 3 steps
"""

MULTIPLIER = """let N = 10
block stage(a_in, d_in, a_out, d_out) with C = 1 nF, valve = hv {
    a_in -> a_out: capacitor C_a, C, leakage_resistance = 10 GOhm
    d_in -> a_out: diode D_a, valve
}
reference d[0]
repeat k from 1 to N {
    (a[k-1], d[k-1], a[k], d[k]): stage S[k], C = C_st
    observe u[k] = voltage(d[k] -> d[k - 1])
    let I[k] = 2 uA tolerance 50 %
    repeat j from k + 1 to 2 * N { m[k][j] -> d[0]: resistor R[k][j], 1 MOhm * j }
    require full: mean(u[k]) >= 1.5 kV
}
d[N] -> d[0]: switch arc, closed_resistance = 50 Ohm, initially = open, control = voltage(d[N] -> d[0]), closes_above = 1 kV
study full: settled
require full: (mean(u) at none - mean(u)) / mean(u) at none <= 15 %
require full: stored_energy() <= 0.35 J
sweep stages: N over [3, 5, 10] by C_st over [1 nF, 4.7 nF]
"""

HARVESTER = """datasheet detector: diode as "zero bias" {
    forward = [150 mV @ 0.1 mA, 350 mV @ 10 mA]
    junction_capacitance = 0.18 pF, built_in_voltage = 0.35 V, capacitance_exponent = 0.5

    reverse_leakage = 10 uA @ 2 V   # at 25 degC
}
let T_air = 20 degC tolerance -40 degC .. +85 degC triangular
in -> gnd: source antenna, sine = 300 mV peak, frequency = 100 kHz, harmonics = [3: 2 % @ 170 deg, 5: 1 %]
in -> gnd: source ramp, points = [0 s: 0 V, 1 ms: 5 V, 1 ms: 0 V], period = 2 ms, constant = -1 V
sweep curve: v from 10 mV to 1 V in 25 log steps by T_air over [-40 degC, 25 degC], studies = [carrier]
sweep corners: extremes of A, B, studies = [full]
sweep all: extremes of each let
sweep spread: 2000 samples of each let, seed = 7, studies = [full]
sweep some: 20 samples of A, B[1..3], seed = 7
sweep broken: open or short each of D[1..4], C1, studies = [faulty]
sweep anything: short each element by open each diode
"""

SIGNS = """let a = 2 - (3 - 4) - 5
let b = 2 / (3 / 4) / 5 * 6
let c = -2^-2^2 + (-2)^2 - -3
let d = (a + b) * c ^ (d / 2)
let e = -(a * b) / -c
let f = 1 V/A + 1 V / A - 1.5e-9 A^2 s
let g = min(a, max(b, c)) + sqrt(abs(sin(90 deg))) + pi
let h = 4700 \u00b5F * 1 k\u03a9
let i = 1e-12
let j = 123456789.125 V
"""

ALL = {
    "universal_input": UNIVERSAL_INPUT,
    "twelve_pulse": TWELVE_PULSE,
    "multiplier": MULTIPLIER,
    "harvester": HARVESTER,
    "signs": SIGNS,
}
