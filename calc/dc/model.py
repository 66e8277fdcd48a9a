"""The twin of a DC machine: shunt, separately excited, series, compound or permanent magnet."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from calc.dc import effects, scatter
from calc.dc.latents import latent_names, rows
from calc.dc.plate import Plate, read_plate
from calc.dc.readings import TABLE
from calc.dc.states import STATES, Bench
from calc.sheet import Machine, Reading
from calc.twin import Ask, Floats, Mode, ModelError, Transform

KINDS = ("dc_shunt", "dc_separately_excited", "dc_series", "dc_compound", "dc_permanent_magnet")
_FIELD_MEASURES = frozenset({"field_voltage", "field_current", "field_resistance"})
_OVERSPEED = 1.7  # uncoupled above this, nobody runs it


class DcTwin:
    """A DC machine as its plate describes it; implements :class:`calc.twin.Twin`."""

    def __init__(self, plate: Plate) -> None:
        self.plate = plate
        self.latents = latent_names(plate)

    @property
    def kind(self) -> str:
        """Machine kind."""
        return self.plate.kind

    @property
    def dim(self) -> int:
        """Number of latents, the two severities last."""
        return len(self.latents)

    @property
    def defaults(self) -> Mapping[str, float]:
        """Attributes of a healthy machine."""
        return effects.HEALTHY

    @property
    def effects(self) -> tuple[str, ...]:
        """Effects that :meth:`modes` knows."""
        return effects.NAMES

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the discrete ways of an effect on this machine; KeyError for an unknown one."""
        return effects.modes(self.plate, effect, severity)

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading."""
        entry = TABLE.get(ask.measure)
        if entry is None or ask.state not in entry[0]:
            return False
        if ask.measure in _FIELD_MEASURES:
            return self.plate.has_field
        if ask.measure == "series_field_resistance":
            return self.plate.has_series_field
        return True

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict readings: one array of shape (rows, 1) per ask, in the inner unit."""
        bench = Bench(self.plate, rows(self.plate, z), attributes)
        return [np.asarray(TABLE[ask.measure][1](bench, ask))[:, None] for ask in asks]

    def back_emf(self, z: Floats, attributes: Mapping[str, Floats], *, state: str) -> Floats:
        """Volts induced in the armature in a state of ``calc.dc.states.STATES``, V, shape (rows,).

        What the terminals show less resistance and brush drop; zero where the shaft stands.
        """
        bench = Bench(self.plate, rows(self.plate, z), attributes)
        now, m = bench.state(state), bench.machine
        return np.asarray(m.emf * now.flux * now.speed * m.volt)

    def plate_misfit(self, z: Floats) -> Floats:
        """Return no residuals: every row of latents is a machine that fits the plate."""
        return np.zeros((len(z), 0))

    def possible(self, z: Floats, attributes: Mapping[str, Floats]) -> Mapping[str, Floats]:
        """For each state, 1.0 where such a machine can be in it, else 0.0."""
        bench = Bench(self.plate, rows(self.plate, z), attributes)
        ones = np.ones(len(z))
        loaded, idle = bench.state("loaded").runs, bench.state("light_load").runs
        found = dict.fromkeys(STATES, ones) | {"loaded": loaded, "light_load": np.maximum(loaded, idle)}
        found["stalled"] = 1.0 - loaded
        if self.plate.kind == "dc_series":
            found["no_load"] = 0.0 * ones
        else:
            alone = bench.state("no_load")
            found["no_load"] = alone.runs * (alone.speed < _OVERSPEED)
        return found

    def chance_of_part(self, ask: Ask) -> float:
        """Certain: what is covered is there."""
        return 1.0 if self.covers(ask) else 0.0

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""
        return scatter.transform(self.plate, measure)

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading, in transformed units."""
        return scatter.model_error(self.plate, ask)


def fit(machine: Machine, *, readings: Sequence[Reading] = ()) -> DcTwin:
    """Build the twin of a DC machine from whatever its plate says, down to nothing.

    Parameters
    ----------
    machine : Machine
        Of a kind in :data:`KINDS`.
    readings : sequence of Reading
        Context only (the speed at which it was spun), never evidence.

    Raises
    ------
    ValueError
        If the kind is not a DC machine.

    """
    if machine.kind not in KINDS:
        raise ValueError(f"no DC model for machine kind {machine.kind!r}; known: {', '.join(KINDS)}")
    return DcTwin(read_plate(machine, readings))
