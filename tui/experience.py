"""What a casebook lends to the weighing of one case: confirmed faults, and the machine's own windings."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from calc.sheet import Machine
    from casebook.book import Casebook
    from casebook.learned import LearnedCounts
    from rules.knowledge import Knowledge
    from rules.learned import Counts, Shift

# A case closed with a fault of these parts left no reference of a sound winding.
WINDING_PARTS: Final = frozenset({"winding", "connection", "armature", "field"})


class Experience:
    """The experience of a shop with machines like that of one case, the case itself left out.

    It is looked up once, so that the odds of a visit move by what is read alone.
    """

    def __init__(self, book: Casebook, case: str, knowledge: Knowledge) -> None:
        self._book = book
        self._case = case
        self._knowledge = knowledge
        self._counts: dict[tuple[str, float | None], LearnedCounts] = {}
        self._own: dict[str, dict[str, tuple[float, ...]]] = {}

    def counts(self, machine: Machine) -> LearnedCounts:
        """Return the confirmed cases on machines of this kind and size."""
        about = (machine.kind, machine.nameplate.number("power"))
        if about not in self._counts:
            self._counts[about] = self._book.learned(*about, leave_out=self._case)
        return self._counts[about]

    def knowledge(self, machine: Machine) -> Knowledge:
        """Return the knowledge, shifted by those cases; the very same where there are none."""
        from rules.learned import with_counts

        return with_counts(self._knowledge, machine.kind, as_counts(self.counts(machine)))

    def words(self, machine: Machine) -> str:
        """Return the sentence that says by how many cases the odds were shifted; nothing without any."""
        cases = self.counts(machine).cases
        if self.knowledge(machine) is self._knowledge:
            return ""
        return (
            f"starting odds shifted by {cases} confirmed case{'' if cases == 1 else 's'} of this casebook on"
            " machines of this kind and size; `plateside learned` shows them, --no-learned leaves them out"
        )

    def shifts(self, machine: Machine) -> tuple[Shift, ...]:
        """Return what those cases move, the largest change first; nothing without any."""
        from rules.learned import shifts

        return shifts(self._knowledge, machine.kind, as_counts(self.counts(machine)))

    def own_windings(self, tag: str | None) -> dict[str, tuple[float, ...]]:
        """Return what a machine's sound windings read in earlier cases, at 25 degC. [ohm]"""
        if not tag:
            return {}
        if tag not in self._own:
            self._own[tag] = self._read_before(tag)
        return self._own[tag]

    def _read_before(self, tag: str) -> dict[str, tuple[float, ...]]:
        """Return the newest sound values of each winding from the machine's history."""
        from casebook.history import own_references

        spoilt = [fault.id for fault in self._knowledge.faults.values() if fault.part in WINDING_PARTS]
        found = own_references(self._book.history(tag), leave_out=self._case, spoilt_by=spoilt)
        return {measure: reference.numbers_at_25_c for measure, reference in found.items()}


def as_counts(learned: LearnedCounts) -> Counts:
    """Return what a casebook has counted in the form that the rules take."""
    from rules.learned import Counts

    return Counts(faults=learned.faults, complaints=learned.complaints, observations=learned.observations)
