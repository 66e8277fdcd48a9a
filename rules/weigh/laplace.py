"""What a fit of modes to readings is made of: residuals, slopes, steps, and the evidence.

The evidence is by Laplace's method, log p(y | mode) = -phi(z*) - 1/2 log det(I + J'WJ) + constants
(D. J. C. MacKay, "Information Theory, Inference, and Learning Algorithms", 2003, ch. 27).
Each reading has a multivariate Student t error of NU degrees of freedom, so that one bad reading
cannot decide (K. L. Lange, R. J. A. Little and J. M. G. Taylor, JASA 84 (1989)). Deterministic.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats, Mode, Twin, attribute_rows
from rules.weigh.frame import NU, Frame

_LONGEST = 4.0  # no step of the latents is longer


@dataclass(frozen=True)
class Fit:
    """Fits of all modes; arrays are modes first, components of all readings second."""

    z: Floats
    """Most probable latents, (modes, dim)."""
    evidence: Floats
    """Log evidence of each mode, constants included, (modes,); a bound where a mode was given up early."""
    predicted: Floats
    """Transformed prediction at the fit, (modes, m)."""
    slope: Floats
    """Derivative of the transformed prediction by the latents, (modes, m, dim)."""
    covariance: Floats
    """Posterior covariance of the latents, (modes, dim, dim)."""
    log_likelihood: Floats
    """Log density of each reading at the fit, (modes, readings)."""
    stretch: Floats
    """Half the squared distance of the latents from typical, plate misfit included, (modes,)."""
    freedom: Floats
    """Half the log determinant: what the data took away from the latents' freedom, (modes,)."""


def plate_cost(misfit: Floats) -> Floats:
    """Cost of plate fields that contradict each other; tails as of readings, for a plate can be wrong too."""
    return np.asarray((0.5 * (NU + 1.0) * np.log1p(misfit**2 / NU)).sum(axis=-1))


def plate_weight(misfit: Floats) -> Floats:
    """Weight of each plate residual in the next step."""
    return np.asarray((NU + 1.0) / (NU + misfit**2))


class Fitter:
    """Fits modes of one twin to one frame of readings."""

    def __init__(self, twin: Twin, data: Frame) -> None:
        self.twin = twin
        self.data = data
        self.dim = twin.dim

    def predict(self, modes: Sequence[Mode], z: Floats) -> tuple[Floats, Floats]:
        """Transformed predictions (modes, k, m) and plate misfits (modes, k, p) for z of (modes, k, dim)."""
        count, per_mode, dim = z.shape
        flat = z.reshape(-1, dim)
        rows = attribute_rows(modes, z, self.twin.defaults)
        answers = self.twin.predict(flat, rows, self.data.asks)
        parts = [one.project(answer) for one, answer in zip(self.data.seen, answers, strict=True)]
        y = np.concatenate(parts, axis=1) if parts else np.zeros((len(flat), 0))
        plate = self.twin.plate_misfit(flat)
        return y.reshape(count, per_mode, -1), plate.reshape(count, per_mode, -1)

    def residual(self, y: Floats) -> Floats:
        """Read minus predicted, over sigma."""
        return np.asarray((self.data.y - y) / self.data.sigma)

    def reading_cost(self, r: Floats) -> Floats:
        """Negative log density of each reading without its constant, (..., readings)."""
        costs = [
            0.5 * (NU + r[..., g].shape[-1]) * np.log1p((r[..., g] ** 2).sum(axis=-1) / NU)
            for g in self.data.groups
        ]
        return np.stack(costs, axis=-1) if costs else np.zeros((*r.shape[:-1], 0))

    def weights(self, r: Floats) -> Floats:
        """Weight of each component in the next step: 1 for an ordinary reading, less for a strange one."""
        w = np.empty_like(r)
        for g in self.data.groups:
            size = g.stop - g.start
            w[..., g] = (NU + size) / (NU + (r[..., g] ** 2).sum(axis=-1, keepdims=True))
        return w

    def objective(self, z: Floats, y: Floats, plate: Floats) -> Floats:
        """Half the squared latents and plate misfit, and the cost of all readings: (modes, k)."""
        prior = 0.5 * (z**2).sum(axis=-1) + plate_cost(plate)
        return np.asarray(prior + self.reading_cost(self.residual(y)).sum(axis=-1))

    def slopes(
        self, modes: Sequence[Mode], z: Floats, active: NDArray[np.int64], step: float
    ) -> tuple[Floats, Floats, Floats, Floats]:
        """Prediction, its derivatives by the active latents, plate misfit and its derivatives."""
        grid = np.repeat(z[:, None, :], len(active) + 1, axis=1)
        # Step inwards, so that a bounded severity is not pushed past its end.
        way = np.where(z[:, active] > 0.0, -step, step)
        place = np.arange(len(active))
        grid[:, place + 1, active] += way
        y, plate = self.predict(modes, grid)
        dy = (y[:, 1:] - y[:, :1]) / way[:, :, None]
        dp = (plate[:, 1:] - plate[:, :1]) / way[:, :, None]
        return y[:, 0], dy.transpose(0, 2, 1), plate[:, 0], dp.transpose(0, 2, 1)

    def normal(self, dy: Floats, dp: Floats, w: Floats, plate_weight: Floats) -> tuple[Floats, Floats]:
        """Whitened slopes and the curvature I + J'WJ on the active latents."""
        j = dy / self.data.sigma[None, :, None]
        curvature = (j * w[:, :, None]).transpose(0, 2, 1) @ j
        if dp.shape[1]:
            curvature += (dp * plate_weight[:, :, None]).transpose(0, 2, 1) @ dp
        return j, curvature + np.eye(dy.shape[2])

    def step(self, z: Floats, y: Floats, dy: Floats, plate: Floats, dp: Floats, heat: float) -> Floats:
        """Gauss-Newton step of the active latents ``z``, at most ``_LONGEST`` long: (modes, active)."""
        r = self.residual(y)
        w = self.weights(r / math.sqrt(heat)) / heat
        u = plate_weight(plate)
        j, curvature = self.normal(dy, dp, w, u)
        pull = ((w * r)[:, None, :] @ j - (u * plate)[:, None, :] @ dp)[:, 0] - z
        move = np.linalg.solve(curvature, pull[:, :, None])[:, :, 0]
        length = np.linalg.norm(move, axis=1, keepdims=True)
        return np.asarray(move * np.minimum(1.0, _LONGEST / np.maximum(length, 1e-9)))


def without(fit: Fit, data: Frame, row: int, group: slice) -> tuple[Floats, Floats]:
    """Latents and covariance of one mode with one reading's own information taken out again.

    The rank-m downdate of the Gaussian posterior: H - J'WJ, inverted by Woodbury's identity.
    """
    z, covariance = fit.z[row], fit.covariance[row]
    sigma = data.sigma[group]
    j = fit.slope[row, group] / sigma[:, None]
    r = (data.y[group] - fit.predicted[row, group]) / sigma
    w = (NU + len(r)) / (NU + float(r @ r))
    middle = np.eye(len(r)) / w - j @ covariance @ j.T
    covariance = covariance + covariance @ j.T @ np.linalg.solve(middle, j @ covariance)
    return z - covariance @ (j.T @ (w * r)), covariance


def fit_of(fit: Fit, row: int) -> Fit:
    """The fit of one mode alone."""
    return Fit(**{name: getattr(fit, name)[row : row + 1] for name in Fit.__dataclass_fields__})


def join_fits(one: Fit, other: Fit) -> Fit:
    """Fits of two sets of modes to the same readings as one."""
    return Fit(
        **{
            name: np.concatenate([getattr(one, name), getattr(other, name)])
            for name in Fit.__dataclass_fields__
        }
    )
