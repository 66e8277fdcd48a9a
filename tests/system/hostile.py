"""Files that nobody means well with: for the rules, for diagnosing, for merging; each with a name."""

from __future__ import annotations

import json
import random
import sqlite3
from collections.abc import Iterator
from pathlib import Path

from calc.sheet_io import read_sheet
from casebook.book import open_casebook

ROOT = Path(__file__).resolve().parents[2]
SHEETS = sorted((ROOT / "tests" / "sheets").glob("*.yaml"))
RULES = sorted((ROOT / "rules").rglob("*.yaml"))
MEGA = 1_000_000
SCALARS = [
    "1e999999999", "-1e-999999999", "9" * 5000, "0x" + "f" * 400, "nan", ".inf", "1_000_000", "1e308",
    "'\\x1b[31m'", '"\\e]0;t\\a"', '"\\u202e"', "a\u200bb", "[/bold]", "{}", "[]", "~", "''", "*a", "&a b",
    "!!python/object:os.system ls", "2026-13-45", "=cmd|' /C calc'!A0", "x" * 70_000, "\U0001f527",
    "e\u0301" * 300, "true", "12:30:59",
]  # fmt: skip


def yaml_files() -> dict[str, bytes]:
    """Return YAML that is a bomb, deep, wide, long, or no text."""
    doubled = "".join(
        f"{chr(98 + n)}: &{chr(98 + n)} [{','.join(['*' + chr(97 + n)] * 9)}]\n" for n in range(9)
    )
    return {
        "bomb of aliases": ("a: &a [x, x, x]\n" + doubled).encode(),
        "deep in brackets": b"[" * (2 * MEGA - 9),
        "deep in braces": b"{a: " * (MEGA // 2 - 9),
        "deep in dashes": b"- " * (MEGA - 9),
        "deep by indent": "".join(" " * n + "a:\n" for n in range(1300)).encode(),
        "wide list": b"faults:\n" + b"- {id: a}\n" * 180_000,
        "wide mapping": "".join(f"k{n}: 1\n" for n in range(190_000)).encode(),
        "many unknown fields": b"faults:\n- {" + b",".join(b"k%d: 1" % n for n in range(30_000)) + b"}\n",
        "long text": b"faults:\n- id: x\n  name: " + b"x" * (2 * MEGA - 99),
        "note of ten megabytes": b"faults:\n- id: x\n  name: " + b"x" * (10 * MEGA),
        "long field name": b"a" * (2 * MEGA - 9) + b": 1\n",
        "huge numbers": b"limits:\n- id: x\n  bands: [{up_to: 1e999999999}, {up_to: "
        + b"9" * 100_000
        + b"}]\n",
        "no utf-8": b"faults:\n- id: \xff\xfe\n",
        "utf-16": "faults: []\n".encode("utf-16"),
        "escape codes": b"faults:\n- id: \x1b[31mred\n",
        "escape codes in quotes": b'faults:\n- id: "\\e]0;title\\a"\n',
        "right to left": 'faults:\n- id: "a\u202eb"\n'.encode(),
        "no width": 'faults:\n- id: "a\u200bb"\n'.encode(),
        "markup": b'faults:\n- id: "[bold]x[/]"\n  name: "[/nope]"\n',
        "zeros": b"\0" * MEGA,
        "tabs": b"\t" * MEGA,
        "colons": b"a:" * (MEGA - 9),
        "torn escape": b'"' + b"\\x" * 900_000,
        "comments": b"# x\n" * 450_000,
        "blank lines": b"\n" * (2 * MEGA - 9),
        "documents": b"---\n" * 400_000,
        "tags": b"! " * (MEGA - 9),
        "a python object": b"!!python/object/apply:os.system [ls]\n",
        "questions": b"? " * (MEGA - 9),
        "anchors": b"&a " * 600_000,
        "one block": b"a: |\n" + b" x\n" * 600_000,
        "nothing": b"",
    }


def line_files(folder: Path) -> dict[str, bytes]:
    """Return JSON Lines that are deep, long, or lie about themselves."""
    good = {
        "id": "01a231aa-1420-7647-b4f4-8e88f4d3a306", "case": "01a231aa-1420-7647-b4f4-8e88f4d3a307",
        "person": "Ada", "time_utc": "2026-03-02T06:00:00.000000Z", "offset_minutes": 60, "kind": "note",
        "body": {"text": "hums"},
    }  # fmt: skip
    line = json.dumps(good).encode() + b"\n"
    return {
        "note of ten megabytes.jsonl": line.replace(b"hums", b"x" * (10 * MEGA)) + line,
        "deep.jsonl": b'{"a":' * MEGA + b"\n" + line,
        "deep body.jsonl": line.replace(b'"hums"', b"[" * 200_000 + b"]" * 200_000),
        "huge number.jsonl": line.replace(b"60", b"9" * 500_000),
        "no number.jsonl": line.replace(b"60", b"1e999").replace(b"hums", b"\\ud800"),
        "escape codes.jsonl": line.replace(b"hums", b"\\u001b[2J") + line.replace(b"Ada", b"\\u202eAda"),
        "the same line often.jsonl": line * 20_000,
        "braces.jsonl": b"{" * MEGA,
        "half a line.jsonl": line[: len(line) // 2],
    }


def casebook_bytes(folder: Path) -> bytes:
    """Return a small whole casebook as one file."""
    path = folder / "whole.db"
    with open_casebook(path) as book:
        for sheet in SHEETS:
            book.log_sheet(read_sheet(sheet), "Ada")
    connection = sqlite3.connect(path)
    connection.execute("PRAGMA journal_mode = DELETE")
    connection.close()
    return path.read_bytes()


def damaged_casebooks(folder: Path, *, seed: int, many: int) -> Iterator[tuple[str, bytes]]:
    """Yield casebooks that were cut, filled with zeros or had bits turned; seeded."""
    whole, chance = casebook_bytes(folder), random.Random(seed)
    for number in range(many):
        raw = bytearray(whole)
        way = chance.choice(("cut", "bits", "page", "head"))
        if way == "cut":
            del raw[chance.randrange(1, len(raw)) :]
        elif way == "page":
            at = chance.randrange(0, len(raw), 4096)
            raw[at : at + 4096] = chance.choice((b"\0", b"\xff", b"\x0d")) * 4096
        else:
            for _ in range(chance.choice((1, 10, 400))):
                raw[chance.randrange(100 if way == "head" else len(raw))] ^= 1 << chance.randrange(8)
        yield f"{way} {number}.db", bytes(raw)


def mutated(source: bytes, chance: random.Random) -> bytes:
    """Return a YAML text with a few things put in the place of others."""
    lines = source.decode().splitlines()
    for _ in range(chance.choice((1, 1, 2, 5))):
        at = chance.randrange(len(lines))
        way = chance.randrange(7)
        if way == 0:
            head, mark, _ = lines[at].partition(": ")
            lines[at] = head + (mark or " ") + chance.choice(SCALARS)
        elif way == 1:
            lines.insert(at, lines[chance.randrange(len(lines))])
        elif way == 2:
            lines[at] = " " * chance.choice((1, 2, 40)) + lines[at]
        elif way == 3:
            del lines[at]
            lines = lines or [""]
        elif way == 4:
            lines = lines[: at + 1]
        elif way == 5:
            lines[at] = lines[at].replace(
                chance.choice((":", "-", "[", "{", ",")), chance.choice(("", ":", "]"))
            )
        else:
            lines[at] += chance.choice(("\x00", "\x1b[2J", "\u202e", "\u200b", "\x85", "\ufeff", " [/]", "é"))
    raw = bytearray("\n".join(lines).encode())
    if chance.random() < 0.2 and raw:
        raw[chance.randrange(len(raw))] = chance.randrange(256)
    return bytes(raw)
