"""A twin seen through other latents: what is not changed comes from the twin behind it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from calc.twin import Ask, Floats, Mode, ModelError, Transform, Twin


class TwinView:
    """Hands everything on to a twin; a view says in :meth:`inner` what its latents are to that twin."""

    def __init__(self, twin: Twin) -> None:
        self._twin = twin

    def inner(self, z: Floats) -> Floats:
        """Latents of the twin behind, from those of the view."""
        return z

    @property
    def kind(self) -> str:
        """Machine kind."""
        return self._twin.kind

    @property
    def dim(self) -> int:
        """Number of latents."""
        return self._twin.dim

    @property
    def defaults(self) -> Mapping[str, float]:
        """Attributes of a healthy machine."""
        return self._twin.defaults

    @property
    def effects(self) -> tuple[str, ...]:
        """Effects that :meth:`modes` knows."""
        return self._twin.effects

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the discrete ways of an effect on this machine."""
        return self._twin.modes(effect, severity)

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading."""
        return self._twin.covers(ask)

    def chance_of_part(self, ask: Ask) -> float:
        """Chance that the machine has the part that is to be read."""
        return self._twin.chance_of_part(ask)

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict readings: one array of shape (rows, arity) per ask."""
        return self._twin.predict(self.inner(z), attributes, asks)

    def plate_misfit(self, z: Floats) -> Floats:
        """Plate fields that the latents do not meet by construction, in sigmas: (rows, n)."""
        return self._twin.plate_misfit(self.inner(z))

    def possible(self, z: Floats, attributes: Mapping[str, Floats]) -> Mapping[str, Floats]:
        """For each state the chance that such a machine can be in it."""
        return self._twin.possible(self.inner(z), attributes)

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""
        return self._twin.transform(measure)

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading."""
        return self._twin.model_error(ask)
