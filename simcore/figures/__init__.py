"""The solution as piecewise polynomials, and the figures read from them: exact integrals, extrema, crossings, harmonics."""
