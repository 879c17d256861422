"""Rows of polynomials as numpy arrays: values, products, changes of variable, roots.

A row holds the coefficients of one polynomial in ascending powers of s, with s from -1 to 1: an interval that is
symmetric about zero keeps powers well conditioned. Nothing here knows time, units or circuits.
"""

from __future__ import annotations

from functools import lru_cache
from math import comb

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

HALVINGS = 44
"""A root is given up on as a touching one when halving has gone this far (a piece's length over 2^44)."""

_MOST_REFINEMENTS, _REFINED = 100, 2e-16


def values(rows: Array, s: Array) -> Array:
    """The value of each row at its own s; s of shape (n,) or (n, k), and the result likewise."""
    table = rows if s.ndim == 1 else rows[:, None, :]
    result = np.zeros(s.shape) + table[..., -1]
    for power in range(rows.shape[1] - 2, -1, -1):
        result = result * s + table[..., power]
    return result


def product(left: Array, right: Array) -> Array:
    """Row by row; orders add."""
    result = np.zeros((len(left), left.shape[1] + right.shape[1] - 1))
    for power in range(left.shape[1]):
        result[:, power : power + right.shape[1]] += left[:, power, None] * right
    return result


def substituted(rows: Array, scale: Array, offset: Array) -> Array:
    """The rows as polynomials of r where s = scale r + offset."""
    result = np.zeros_like(rows)
    result[:, 0] = rows[:, -1]
    for power in range(rows.shape[1] - 2, -1, -1):
        raised = np.zeros_like(rows)
        raised[:, 1:] = result[:, :-1] * scale[:, None]
        result = raised + result * offset[:, None]
        result[:, 0] += rows[:, power]
    return result


def derivative(rows: Array) -> Array:
    """d/ds of each row, of an order one lower (order 0 stays)."""
    if rows.shape[1] == 1:
        return np.zeros_like(rows)
    return rows[:, 1:] * np.arange(1.0, rows.shape[1])


def padded(rows: Array, columns: int) -> Array:
    """The rows with zero coefficients added up to that many columns."""
    if rows.shape[1] >= columns:
        return rows
    return np.concatenate([rows, np.zeros((len(rows), columns - rows.shape[1]))], axis=1)


@lru_cache(maxsize=64)
def even_moments(columns: int, other: int = 1) -> Array:
    """Half the integral of s^i s^j from -1 to 1, shape (columns, other): the mean of a product over a piece."""
    powers = np.arange(columns)[:, None] + np.arange(other)[None, :]
    return np.where(powers % 2 == 0, 1.0 / (powers + 1.0), 0.0)


def means(rows: Array) -> Array:
    """Mean of each row over its piece, shape (n,)."""
    return rows @ even_moments(rows.shape[1])[:, 0]


def product_means(left: Array, right: Array) -> Array:
    """Mean of left times right over each piece, shape (n,), without forming the product."""
    return np.einsum("ni,ij,nj->n", left, even_moments(left.shape[1], right.shape[1]), right)


@lru_cache(maxsize=64)
def lobatto_points(order: int) -> Array:
    """The order + 1 extrema of the Chebyshev polynomial, ends included, rising."""
    return -np.cos(np.pi * np.arange(order + 1) / order)


@lru_cache(maxsize=64)
def _from_points(order: int) -> Array:
    return np.asarray(np.linalg.inv(np.vander(lobatto_points(order), order + 1, increasing=True)), dtype=np.float64)


def through(samples: Array) -> Array:
    """Coefficients of the polynomials through samples (n, order + 1) at lobatto_points(order)."""
    return samples @ _from_points(samples.shape[1] - 1).T


@lru_cache(maxsize=64)
def _bernstein_matrix(order: int) -> Array:
    """Takes ascending powers of s on [-1, 1] to the Bernstein form on it.

    With s = 2 r - 1, s^k = sum over j of C(k, j) 2^j (-1)^(k-j) r^j and r^j = sum over i of C(i, j) / C(order, j) B_i.
    """
    shift = np.zeros((order + 1, order + 1))
    raised = np.zeros((order + 1, order + 1))
    for k in range(order + 1):
        for j in range(k + 1):
            shift[j, k] = comb(k, j) * 2.0**j * (-1.0) ** (k - j)
            raised[k, j] = comb(k, j) / comb(order, j)
    return raised @ shift


def bernstein(rows: Array) -> Array:
    """Bernstein coefficients: a row never leaves the range of its own."""
    return rows @ _bernstein_matrix(rows.shape[1] - 1).T


def _variations(coefficients: Array) -> NDArray[np.int64]:
    """Sign changes along each row, zeros passed over: at least as many as there are roots inside (Descartes' rule)."""
    signs = np.sign(coefficients)
    for column in range(1, signs.shape[1]):
        signs[:, column] = np.where(signs[:, column] == 0.0, signs[:, column - 1], signs[:, column])
    return np.count_nonzero(signs[:, 1:] * signs[:, :-1] < 0.0, axis=1)


def _halves(coefficients: Array) -> tuple[Array, Array]:
    """The Bernstein forms of both halves (de Casteljau)."""
    order = coefficients.shape[1] - 1
    left = np.empty_like(coefficients)
    right = np.empty_like(coefficients)
    present = coefficients
    for step in range(order + 1):
        left[:, step] = present[:, 0]
        right[:, order - step] = present[:, -1]
        present = 0.5 * (present[:, 1:] + present[:, :-1])
    return left, right


def _refined(rows: Array, low: Array, high: Array, sign: Array) -> Array:
    """The one root of each row between low and high; sign is that of the row just above low.

    Newton's method, and halving wherever that would leave the bracket or not halve the last step.
    """
    slopes = derivative(rows)
    found, last = 0.5 * (low + high), high - low
    for _ in range(_MOST_REFINEMENTS):
        value, slope = values(rows, found), values(slopes, found)
        same = value * sign > 0.0
        low, high = np.where(same, found, low), np.where(same, high, found)
        with np.errstate(all="ignore"):
            step = -value / slope
        newton = (np.abs(step) <= 0.5 * np.abs(last)) & (found + step > low) & (found + step < high)
        step = np.where(value == 0.0, 0.0, np.where(newton, step, 0.5 * (low + high) - found))
        found, last = found + step, step
        if np.all(np.abs(step) <= _REFINED):
            break
    return found


def roots(rows: Array) -> tuple[NDArray[np.int64], Array]:
    """All roots strictly inside (-1, 1): the row of each and its s, in order of both.

    Descartes' rule with halving (Lane and Riesenfeld, BIT 21, 1981): rows without a sign change among their Bernstein
    coefficients are left at once, so the cost is that of the few rows which may have a root. A touching (double) root
    may be given twice, or not at all where rounding lifts it; a row that is zero throughout has none.
    """
    if rows.shape[1] == 2:
        straight = np.flatnonzero(np.sign(rows[:, 0] - rows[:, 1]) * np.sign(rows[:, 0] + rows[:, 1]) < 0.0)
        return straight, -rows[straight, 0] / rows[straight, 1]
    inside = np.flatnonzero(_has_both_signs(bernstein(rows)))
    coefficients = bernstein(rows[inside])
    low, width = np.full(len(inside), -1.0), 2.0
    found_rows, found = [np.zeros(0, dtype=np.int64)], [np.zeros(0)]
    for _ in range(HALVINGS):
        changes = _variations(coefficients)
        single = changes == 1
        if single.any():
            first = coefficients[single]
            sign = np.sign(first[np.arange(len(first)), np.argmax(first != 0.0, axis=1)])
            found_rows.append(inside[single])
            found.append(_refined(rows[inside[single]], low[single], low[single] + width, sign))
        many = changes > 1
        inside, coefficients, low = inside[many], coefficients[many], low[many]
        if len(inside) == 0:
            break
        left, right = _halves(coefficients)
        width *= 0.5
        zero = left[:, -1] == 0.0
        found_rows.append(inside[zero])
        found.append(low[zero] + width)
        inside = np.concatenate([inside, inside])
        coefficients = np.concatenate([left, right])
        low = np.concatenate([low, low + width])
    found_rows.append(inside)
    found.append(low + 0.5 * width)
    all_rows, all_found = np.concatenate(found_rows), np.concatenate(found)
    order = np.lexsort((all_found, all_rows))
    return all_rows[order], all_found[order]


def _has_both_signs(coefficients: Array) -> NDArray[np.bool_]:
    return (coefficients.min(axis=1) < 0.0) & (coefficients.max(axis=1) > 0.0)
