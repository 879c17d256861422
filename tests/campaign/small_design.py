"""A small design with every form of axis, solved in a few milliseconds a variant."""

DESIGN = """
purpose "half-wave supply"
require work: mean(u_out) between 5 V and 9.6 V
require work: ripple(u_out) <= 1.5 V                 as "ripple"
require work: peak(current(D1)) <= 5 A
require start: peak(u_out) <= 12 V
study work:  settled
study start: transient, duration = 40 ms
study idle:  settled, set R_load = 10 kOhm
let V = 10 V  tolerance 10 %
let C = 1000 uF  tolerance -20 % .. +50 %  triangular
let R_load = 100 Ohm  tolerance 5 %  normal
let valve = weak
datasheet weak: diode { saturation_current = 1 nA, ideality_factor = 1.8 }
datasheet strong: diode { saturation_current = 20 nA, ideality_factor = 1.9, series_resistance = 15 mOhm }
a -> g: source e, sine = V peak, frequency = 50 Hz, series_resistance = 0.5 Ohm
a -> p: diode D1, valve
p -> g: capacitor C1, C
p -> g: resistor R1, R_load
reference g
observe u_out = voltage(p)
sweep loads:   R_load from 50 Ohm to 200 Ohm in 3 log steps by valve over [weak, strong], studies = [work]
sweep corners: extremes of V, C, studies = [work]
sweep spread:  12 samples of each let, seed = 3, studies = [work]
sweep broken:  open or short each element, studies = [work, start]
"""
