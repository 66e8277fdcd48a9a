"""A case sheet out of plain data: every field decoded, every problem collected."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Final

from calc import vocabulary as words
from calc.errors import Problem, clip
from calc.fields import Fields, did_you_mean
from calc.lookup import code_letters
from calc.nameplate import impossible
from calc.plate_fields import fill_rating_in_use, insulation_class, letter, single
from calc.plausible import check_limits, check_plate_values, check_reading
from calc.quantities import DC_KINDS, KINDS, MEASURES, STATES, Measure, arity
from calc.safe_yaml import Document
from calc.sheet import CaseSheet, Machine, Nameplate, Rating, Reading, Supply

_KNOWN_WELL: Final = DC_KINDS | {"induction_3ph", "induction_1ph"}
_NEEDED: Final = frozenset({"format", "machine", "complaint"})
_SHEET: Final = ("format", "machine", "kit", "complaint", "readings", "observations")
_MACHINE: Final = (
    "tag", "kind", "nameplate", "supply", "starter", "load", "mount", "hazardous_area", "brake",
    "thermal_protector",
)  # fmt: skip
_PLATE: Final = (
    *words.PLATE_DIMENSION, *words.PLATE_WORDS, *words.PLATE_TEXTS,
    "code_letter", "design_letter", "insulation_class", "ratings",
)  # fmt: skip
_READING: Final = (
    "measure", "state", "value", *words.CONTEXT_DIMENSION, *words.CONTEXT_WORDS, *words.CONTEXT_TEXTS,
)  # fmt: skip
_DC_INSTEAD: Final = {"line_current": "armature_current", "supply_voltage": "armature_voltage"}
_AC_INSTEAD: Final = {after: before for before, after in _DC_INSTEAD.items()}


@dataclass
class Decoder:
    """Decodes one document into a case sheet."""

    document: Document
    problems: list[Problem] = field(default_factory=list)

    def sheet(self) -> CaseSheet | None:
        """Return the sheet, or None where ``problems`` says why not."""
        if not isinstance(self.document.data, dict) or not _NEEDED & self.document.data.keys():
            self._no_sheet()
            return None
        top = Fields(self.document, (), self.document.data, self.problems)
        top.refuse_unknown(_SHEET)
        self._format(top)
        machine = self._machine(top)
        complaint = top.id("complaint")
        if "complaint" not in top.data or top.data["complaint"] is None:
            top.wrong("complaint", "nothing", "what is wrong, such as trips_under_load")
        readings = tuple(r for r in (self._reading(top, i, machine) for i, _ in top.items("readings")) if r)
        observations = self._observations(top)
        kit = self._kit(top)
        self.problems.sort(key=lambda problem: problem.line or 0)
        if self.problems or complaint is None:
            return None
        return CaseSheet(
            machine=machine, complaint=complaint, readings=readings, observations=observations, kit=kit
        )

    def _no_sheet(self) -> None:
        data = self.document.data
        kinds = {"NoneType": "an empty file", "list": "a list", "dict": "fields of something else"}
        given = kinds.get(type(data).__name__) or clip(data)
        allowed = "a case sheet: format, machine, complaint, readings, observations"
        self.problems.append(
            Problem(self.document.file, "", given, allowed, self.document.line(()) if data else None)
        )

    @staticmethod
    def _format(top: Fields) -> None:
        given = top.data.get("format")
        if given is None:
            top.wrong("format", "nothing", "format: 1")
        elif str(given) != "1":
            top.wrong("format", clip(given), "1, the format that this version reads")

    def _machine(self, top: Fields) -> Machine:
        fields = top.inner("machine")
        fields.refuse_unknown(_MACHINE)
        kind = fields.word("kind", KINDS)
        if fields.data.get("kind") is None:
            fields.wrong("kind", "nothing", f"the machine's kind: {', '.join(KINDS)}")
        load = fields.inner("load", "type: conveyor")
        load.refuse_unknown({"type"})
        supply = self._supply(fields)
        before = len(self.problems)
        machine = Machine(
            kind=kind or "",
            tag=fields.text("tag", longest=words.TAG_LENGTH),
            nameplate=self._plate(fields, kind or "", supply),
            supply=supply,
            starter=fields.word("starter", words.STARTERS),
            load_type=load.word("type", words.LOADS),
            mount=fields.word("mount", words.MOUNTS),
            hazardous_area=fields.flag("hazardous_area"),
            brake=fields.flag("brake"),
            thermal_protector=fields.word("thermal_protector", words.PROTECTORS),
        )
        if len(self.problems) == before and (remark := impossible(machine)):
            plate = fields.inner("nameplate")
            plate.wrong(
                remark.likely or "power", remark.says, remark.suggestion or "fields that belong together"
            )
        return machine

    @staticmethod
    def _supply(machine: Fields) -> Supply:
        fields = machine.inner("supply", "source: mains")
        fields.refuse_unknown(("source", *words.SUPPLY_DIMENSION))
        values = {name: single(fields, name, dimension) for name, dimension in words.SUPPLY_DIMENSION.items()}
        supply = Supply(source=fields.word("source", words.SOURCES), **values)
        check_limits(fields, supply)
        return supply

    def _plate(self, machine: Fields, kind: str, supply: Supply) -> Nameplate:
        fields = machine.inner("nameplate", "voltage: 400 V")
        fields.refuse_unknown(_PLATE)
        found: dict[str, Any] = {
            name: single(fields, name, _dimension(fields, name, dimension, kind))
            for name, dimension in words.PLATE_DIMENSION.items()
        }
        found |= {name: fields.word(name, allowed) for name, allowed in words.PLATE_WORDS.items()}
        found |= {name: fields.text(name, longest=64) for name in words.PLATE_TEXTS}
        found["code_letter"] = letter(fields, "code_letter", code_letters())
        found["design_letter"] = letter(fields, "design_letter", words.DESIGN_LETTERS)
        found["insulation_class"] = insulation_class(fields)
        ratings = tuple(r for r in (self._rating(fields, i) for i, _ in fields.items("ratings")) if r)
        found["ratings"] = ratings
        if ratings:
            fill_rating_in_use(fields, found, supply)
        plate = Nameplate(**found)
        check_plate_values(fields, plate, kind)
        return plate

    @staticmethod
    def _rating(plate: Fields, index: int) -> Rating | None:
        fields = plate.entry("ratings", index, "voltage: 230 V, current: 28 A")
        if fields is None:
            return None
        fields.refuse_unknown(words.RATING_FIELDS)
        found: dict[str, Any] = {
            name: single(fields, name, words.PLATE_DIMENSION[name])
            for name in words.RATING_FIELDS
            if name != "connection"
        }
        if fields.data.get("voltage") is None:
            fields.wrong("voltage", "nothing", "the voltage that this rating belongs to")
        rating = Rating(**found, connection=fields.word("connection", words.CONNECTIONS))
        check_limits(fields, rating)
        return rating

    def _reading(self, top: Fields, index: int, machine: Machine) -> Reading | None:
        fields = top.entry("readings", index, "measure: speed, state: loaded, value: 1455 rpm")
        if fields is None:
            return None
        before = len(self.problems)
        fields.refuse_unknown(_READING)
        measure = fields.word("measure", MEASURES)
        state = fields.word("state", STATES)
        for name in ("measure", "state"):
            if fields.data.get(name) is None:
                fields.wrong(name, "nothing", f"the {name} of the reading")
        if measure is None or not suits(fields, MEASURES[measure], machine.kind):
            return None
        context = self._context(fields)
        entry = MEASURES[measure]
        values = fields.values(
            "value", entry.dimension, wanted=_wanted(fields, entry, machine.kind), what=entry.label
        )
        if values is None or state is None or len(self.problems) > before:
            return None
        reading = Reading(measure=measure, state=state, values=values, **context)
        check_reading(fields, reading, machine)
        return reading

    @staticmethod
    def _context(fields: Fields) -> dict[str, Any]:
        found: dict[str, Any] = {
            name: single(fields, name, dimension) for name, dimension in words.CONTEXT_DIMENSION.items()
        }
        found |= {name: fields.word(name, allowed) for name, allowed in words.CONTEXT_WORDS.items()}
        return found | {
            name: fields.text(name, longest=longest) for name, longest in words.CONTEXT_TEXTS.items()
        }

    @staticmethod
    def _observations(top: Fields) -> dict[str, bool]:
        fields = top.inner("observations", "hums: yes")
        found: dict[str, bool] = {}
        for name in fields.data:
            if fields.named(name) and (seen := fields.flag(name)) is not None:
                found[name] = seen
        return found

    @staticmethod
    def _kit(top: Fields) -> tuple[str, ...] | None:
        if top.data.get("kit") is None:
            return None
        return tuple(
            str(item) for index, item in top.items("kit") if top.named(item, field="kit", step=index)
        )


def suits(fields: Fields, measure: Measure, kind: str) -> bool:
    """Check that a measure can be read on this kind of machine."""
    if kind not in _KNOWN_WELL or measure.suits(kind):
        return True
    instead = (_DC_INSTEAD if kind in DC_KINDS else _AC_INSTEAD).get(measure.id)
    known = [m.id for m in MEASURES.values() if m.suits(kind)]
    hint = f"did you mean {instead}?" if instead else did_you_mean(measure.id, known)
    fields.wrong("measure", measure.id, f"a {KINDS[kind]} has no {measure.label}; {hint}")
    return False


def _wanted(fields: Fields, measure: Measure, kind: str) -> int:
    """Return how many values are due; where one or three make sense, what is given decides."""
    given = fields.data.get("value")
    many = isinstance(given, list) and len(given) == 3
    if measure.arity == 3 and many and (kind not in _KNOWN_WELL or measure.kinds == frozenset({"any"})):
        return 3
    return arity(measure.id, kind)


def _dimension(fields: Fields, name: str, dimension: str, kind: str) -> str:
    """Return a plate field's dimension: an alternator's power may be apparent."""
    apparent = name == "power" and kind in {"alternator", "synchronous_wound"}
    return "apparent_power" if apparent and "va" in str(fields.data.get(name)).casefold() else dimension
