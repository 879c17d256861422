"""The solution as piecewise polynomials, and the figures read from them: integrals, extrema, crossings, harmonics."""
