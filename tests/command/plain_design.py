"""A small design with a study of each kind that lasts, a requirement and a sweep, for what happens around it."""

GOOD = """
a -> g: source e, sine = V peak, frequency = 50 Hz
a -> p: diode D1, saturation_current = 1 nA, ideality_factor = 1.8
p -> g: capacitor C1, 1000 uF
p -> g: resistor R1, 100 Ohm
reference g
let V = 10 V tolerance 10 %
observe u_out = voltage(p)
study s: settled
study t: transient, duration = 100 ms
require s: mean(u_out) >= 5 V
sweep corners: extremes of V
"""
