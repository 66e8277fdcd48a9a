"""Case sheets in and out: YAML text (format 1) to ``CaseSheet`` and back."""

from __future__ import annotations

import os
from collections.abc import Mapping
from typing import Any, Final

import yaml

from calc.errors import InputError
from calc.safe_yaml import Document, Plain, load_document, read_document
from calc.sheet import CaseSheet, Machine, Nameplate, Rating, Reading, Supply, Value
from calc.sheet_decode import Decoder


def read_sheet(path: str | os.PathLike[str]) -> CaseSheet:
    """Read a case sheet from a file.

    Raises
    ------
    InputError
        With every problem of the sheet: file, line, field, given, allowed.

    """
    return sheet_from_document(read_document(path))


def sheet_from_text(text: str, *, file: str) -> CaseSheet:
    """Read a case sheet from YAML text; ``file`` is its name in messages.

    Raises
    ------
    InputError
        As ``read_sheet``.

    """
    return sheet_from_document(load_document(text, file=file))


def sheet_from_plain(data: Mapping[str, object], *, file: str = "") -> CaseSheet:
    """Read a case sheet from dictionaries, lists, texts, numbers and bools.

    Raises
    ------
    InputError
        As ``read_sheet``, without lines.

    """
    return sheet_from_document(Document(file, _as_text(data), {}))


def sheet_from_document(document: Document) -> CaseSheet:
    """Read a case sheet from plain data with its lines; raises ``InputError`` as ``read_sheet``."""
    decoder = Decoder(document)
    sheet = decoder.sheet()
    if sheet is None:
        raise InputError(decoder.problems)
    return sheet


def _as_text(data: object) -> Plain:
    """Turn numbers and bools into the text that a sheet would hold."""
    if isinstance(data, Mapping):
        return {str(key): _as_text(value) for key, value in data.items()}
    if isinstance(data, list | tuple):
        return [_as_text(value) for value in data]
    if isinstance(data, bool):
        return "yes" if data else "no"
    return None if data is None else str(data)


def sheet_to_yaml(sheet: CaseSheet) -> str:
    """Write a case sheet as YAML; ``sheet_from_text`` reads the same sheet from it."""
    return yaml.dump(sheet_to_plain(sheet), Dumper=_Dumper, sort_keys=False, allow_unicode=True, width=10_000)


def sheet_to_plain(sheet: CaseSheet) -> dict[str, Any]:
    """Return a case sheet as dictionaries, lists and texts, as it stands in a file."""
    plain = {
        "format": str(sheet.format),
        "machine": _machine(sheet.machine),
        "kit": None if sheet.kit is None else list(sheet.kit),
        "complaint": sheet.complaint,
        "readings": [_Line(_reading(reading)) for reading in sheet.readings],
        "observations": dict(sheet.observations),
    }
    return _given(plain)


_NULL_ONLY: Final = {
    first: [resolver for resolver in resolvers if resolver[0] == "tag:yaml.org,2002:null"]
    for first, resolvers in yaml.SafeDumper.yaml_implicit_resolvers.items()
}


class _Line(dict[str, Any]):
    """A mapping that is written on one line."""


class _Dumper(yaml.SafeDumper):
    """Writes one reading a line, and quotes only what would be read as null."""

    yaml_implicit_resolvers = _NULL_ONLY

    def ignore_aliases(self, data: Any) -> bool:  # noqa: ANN401  the base class says so
        """Write every value out."""
        return True


def _one_line(dumper: yaml.SafeDumper, data: _Line) -> yaml.Node:
    return dumper.represent_mapping("tag:yaml.org,2002:map", data, flow_style=True)


def _yes_or_no(dumper: yaml.SafeDumper, data: bool) -> yaml.Node:
    return dumper.represent_str("yes" if data else "no")


_Dumper.add_representer(_Line, _one_line)
_Dumper.add_representer(bool, _yes_or_no)


def _machine(machine: Machine) -> dict[str, Any]:
    load = None if machine.load_type is None else {"type": machine.load_type}
    fields = {name: getattr(machine, name) for name in Machine.__struct_fields__ if name != "load_type"}
    fields["nameplate"] = _plate(machine.nameplate)
    fields["supply"] = _texts(machine.supply)
    return _given(fields | {"load": load})


def _plate(plate: Nameplate) -> dict[str, Any]:
    return _texts(plate) | ({"ratings": [_Line(_texts(r)) for r in plate.ratings]} if plate.ratings else {})


def _texts(part: Nameplate | Supply | Rating) -> dict[str, Any]:
    """Return the fields of a part that are given, as typed."""
    fields = {name: getattr(part, name) for name in part.__struct_fields__ if name != "ratings"}
    return _given({name: value.text if isinstance(value, Value) else value for name, value in fields.items()})


def _reading(reading: Reading) -> dict[str, Any]:
    values = [value.text if value.is_read else None for value in reading.values]
    fields = {name: getattr(reading, name) for name in reading.__struct_fields__ if name != "values"}
    plain = {name: value.text if isinstance(value, Value) else value for name, value in fields.items()}
    head = {
        "measure": reading.measure,
        "state": reading.state,
        "value": values if len(values) > 1 else values[0],
    }
    return head | _given({name: value for name, value in plain.items() if name not in head})


def _given(fields: dict[str, Any]) -> dict[str, Any]:
    return {name: value for name, value in fields.items() if value is not None and value != {}}
