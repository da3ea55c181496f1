"""Fitting explanations to the readings: Gauss-Newton steps on all of them at once, then the evidence of each.

The evidence is that of a linearised Gaussian model (Laplace's approximation; MacKay 1992): it prefers the simpler
without a penalty chosen by hand, works with any subset of readings, and gives a band on every length.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldtool.diagnosis.chain import FIXED, Specs, live_columns, places_by_gaps, predict
from fieldtool.diagnosis.frame import Array, Frame

__all__ = ["OPEN_BUT_FITS", "READS_BUT_OPEN", "Fit", "fit"]

OPEN_BUT_FITS = 6.0
"""What it costs an explanation that a reading is open where it expects a number: a slip or a fault at that point.
Twice that for an end-to-end reading, where a clip has to be off."""

READS_BUT_OPEN = 14.0
"""What it costs that a number was read through a break."""

_STEP = 1e-4


@dataclass(frozen=True, slots=True)
class Fit:
    """Fitted explanations: standardised parameters, predictions, evidence and what is left over."""

    standard: Array
    shown: Array
    evidence: Array
    chi2: Array
    used: NDArray[np.bool_]
    curvature: Array


def fit(frame: Frame, specs: Specs, start: Array, hidden: NDArray[np.bool_] | None = None, steps: int = 3) -> Fit:
    """Fit every explanation from its own start.

    ``hidden`` (explanations x readings) leaves readings out of the fit of one explanation; the caller accounts for
    them. Never raises: what cannot be fitted has poor evidence.
    """
    rows, wide = start.shape
    shown = predict(frame, specs, start[:, None, :])[:, 0]
    open_here = np.isinf(shown)
    used = (frame.seen & ~frame.gone)[None, :] & ~open_here
    clash = frame.gone[None, :] & ~open_here
    through = (frame.seen & ~frame.gone)[None, :] & open_here
    if hidden is not None:
        used, clash, through = used & ~hidden, clash & ~hidden, through & ~hidden
    constant = OPEN_BUT_FITS * (clash.sum(axis=1) + clash[:, :3].sum(axis=1)) + READS_BUT_OPEN * through.sum(axis=1)
    at = start.copy()
    eye = np.eye(wide)
    scale = np.where(used, 1.0 / frame.sigma, 0.0)
    tries = np.array([1.0, 0.5, 0.2, 0.05])
    slope = np.zeros((rows, used.shape[1], wide))
    for step in range(steps + 1):
        left, slope = _linear(frame, specs, at, scale)
        if step == steps:
            break
        hessian = np.swapaxes(slope, 1, 2) @ slope + eye
        pull = (np.swapaxes(slope, 1, 2) @ left[..., None])[..., 0] - at
        move = np.clip(np.linalg.solve(hessian, pull[..., None])[..., 0], -2.5, 2.5)
        trial = at[:, None, :] + tries[None, :, None] * move[:, None, :]
        cost = _cost(frame, specs, trial, scale)
        now = (left**2).sum(axis=1) + (at**2).sum(axis=1)
        best = cost.argmin(axis=1)
        better = cost[np.arange(rows), best] < now
        at = np.where(better[:, None], trial[np.arange(rows), best], at)
    hessian = np.swapaxes(slope, 1, 2) @ slope + eye
    chi2 = (left**2).sum(axis=1)
    _, logdet = np.linalg.slogdet(hessian)
    evidence = -0.5 * chi2 - 0.5 * (at**2).sum(axis=1) - 0.5 * logdet - constant
    shown = predict(frame, specs, at[:, None, :], full=True)[:, 0]
    return Fit(at, shown, np.nan_to_num(evidence, nan=-1e9, neginf=-1e9), chi2, used, hessian)


def _residual(frame: Frame, shown: Array, scale: Array) -> Array:
    shown = np.where(np.isfinite(shown), shown, 0.0)
    return np.asarray((frame.y - shown) * (scale[:, None, :] if shown.ndim == 3 else scale), dtype=np.float64)


def _cost(frame: Frame, specs: Specs, trial: Array, scale: Array) -> Array:
    left = _residual(frame, predict(frame, specs, trial), scale)
    return np.asarray((left**2).sum(axis=2) + (trial**2).sum(axis=2), dtype=np.float64)


def _linear(frame: Frame, specs: Specs, at: Array, scale: Array) -> tuple[Array, Array]:
    """What is left of each reading, and how each parameter would move it, both in standard deviations."""
    columns = live_columns(specs)
    rows, wide = at.shape
    linked = bool((specs.link[:, 0] >= 0).any())
    if linked:
        columns = columns + list(range(FIXED, wide))
    many = 1 + len(columns) + (0 if linked else 2)
    moved = np.repeat(at[:, None, :], many, axis=1)
    for number, column in enumerate(columns, start=1):
        moved[:, number, column] += _STEP
    nudge = np.zeros((2, many))
    if not linked:
        nudge[0, -2] = nudge[1, -1] = _STEP
    left = _residual(frame, predict(frame, specs, moved, (nudge[0], nudge[1])), scale)
    change = (left[:, :1, :] - left[:, 1:, :]) / _STEP
    slope = np.zeros((rows, left.shape[2], wide))
    slope[:, :, columns] = np.swapaxes(change[:, : len(columns)], 1, 2)
    if not linked:
        count = frame.count
        moves = places_by_gaps(frame, specs, at)
        by_place = change[:, -2, 3:].reshape(rows, 5, count, 1)
        last = FIXED + moves.shape[2]
        slope[:, 3:, FIXED:last] = (by_place * moves[:, None]).reshape(rows, 5 * count, moves.shape[2])
        by_spur = change[:, -1, 3:].reshape(rows, 5, count)
        for column, point in enumerate(specs.spurs, start=last):
            slots = 3 + np.arange(5) * count + point
            slope[:, slots, column] = by_spur[:, :, point] * specs.spread[:, column, None]
    return left[:, 0], slope
