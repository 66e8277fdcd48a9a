"""What a meter can show: the smallest fault that one more reading would tell from a healthy machine."""

from __future__ import annotations

from statistics import NormalDist

import numpy as np

from calc.severities import say_severity
from calc.twin import Mode
from rules.weigh.frame import frame
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.laplace import Fitter
from rules.weigh.posterior import Posterior
from rules.weigh.predict import Outlook
from rules.weigh.settings import weighing

_GRID = np.linspace(-2.2, 2.2, 9)  # severity latents that are tried, small to large


def smallest_seen(posterior: Posterior, look: Outlook, hypotheses: tuple[Hypothesis, ...]) -> str:
    """Say from what size on a reading shows the leading suspect that has a size; empty if none has one."""
    healthy = next(h for h in posterior.hypotheses if h.fault == "healthy")
    names = {f.id: f.name for f in posterior.faults}
    for hypothesis in hypotheses:
        mode = posterior.modes[hypothesis.place]
        if hypothesis.fault == "healthy" or not mode.severity or "+" in hypothesis.fault:
            continue
        amount = _smallest(posterior, look, mode, healthy.place)
        attribute = mode.severity[0].attribute
        if amount is None:
            return f"this meter cannot show {names[hypothesis.fault]} on this machine"
        return f"shows {names[hypothesis.fault]} from about {say_severity(attribute, amount)}"
    return ""


def _smallest(posterior: Posterior, look: Outlook, mode: Mode, healthy: int) -> float | None:
    """Smallest severity at which the reading leaves the healthy prediction by the set number of sigmas."""
    z = np.repeat(posterior.fit.z[healthy][None, None, :], len(_GRID), axis=1)
    z[0, :, -2] = _GRID
    fitter = Fitter(posterior.twin, frame([look.blank]))
    with_fault, _ = fitter.predict([mode], z)
    without, _ = fitter.predict(posterior.twin.modes("none")[:1], z[:, :1])
    gap = (with_fault[0] - without[0]) / look.error
    seen = np.sqrt((gap**2).sum(axis=1)) > weighing().proposal.visible_sigmas
    if not seen.any():
        return None
    share = NormalDist().cdf(float(_GRID[int(np.argmax(seen))]))
    low, high = mode.severity[0].low, mode.severity[0].high
    return float(low * (high / low) ** share)
