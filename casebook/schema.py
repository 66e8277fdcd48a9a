"""The tables of a casebook file, and the migrations that lead to them.

``entry`` is the log: rows are added, never changed, never deleted; triggers refuse
both. All other tables are derived from it and can be rebuilt at any time. A
migration runs in one transaction together with its own record; there is no way back.
"""

from __future__ import annotations

from typing import Final

import msgspec

APPLICATION_ID: Final = 0x504C4154  # "PLAT", in the file's header


class Migration(msgspec.Struct, frozen=True, kw_only=True):
    """One step from the version before; ``rebuild`` when the derived tables must be made anew."""

    version: int
    name: str
    statements: tuple[str, ...]
    rebuild: bool = False


_LOG = (
    """CREATE TABLE migration (
        version INTEGER PRIMARY KEY, name TEXT NOT NULL, applied_utc TEXT NOT NULL)""",
    """CREATE TABLE entry (
        seq INTEGER PRIMARY KEY,               -- order of arrival in this file
        id TEXT NOT NULL UNIQUE CHECK (length(id) = 36),
        case_id TEXT NOT NULL CHECK (length(case_id) = 36),
        person TEXT NOT NULL,
        time_utc TEXT NOT NULL CHECK (length(time_utc) = 27),
        offset_minutes INTEGER NOT NULL,
        kind TEXT NOT NULL,
        body_version INTEGER NOT NULL,
        after TEXT,
        body TEXT NOT NULL)""",
    "CREATE INDEX entry_by_case ON entry (case_id)",
    """CREATE TRIGGER entry_never_changes BEFORE UPDATE ON entry
        BEGIN SELECT RAISE(ABORT, 'an entry is never changed; write a correction'); END""",
    """CREATE TRIGGER entry_never_goes BEFORE DELETE ON entry
        BEGIN SELECT RAISE(ABORT, 'an entry is never deleted; write a correction'); END""",
)

# ``place`` grows with the time of a case's last entry, so that "newest first" is the
# order of the table and of the full-text index alike, and costs no sorting.
_HEADS = (
    """CREATE TABLE case_head (
        place INTEGER PRIMARY KEY,
        case_id TEXT NOT NULL UNIQUE,
        number TEXT NOT NULL,
        status TEXT NOT NULL,
        opened_utc TEXT NOT NULL,
        last_utc TEXT NOT NULL,
        last_id TEXT NOT NULL,
        entries INTEGER NOT NULL,
        tag TEXT NOT NULL,
        machine_key TEXT NOT NULL,
        kind TEXT NOT NULL,
        complaint TEXT NOT NULL,
        suspect TEXT NOT NULL,
        found TEXT NOT NULL,
        confirmed TEXT NOT NULL,
        persons TEXT NOT NULL,
        plate TEXT NOT NULL,
        words TEXT NOT NULL)""",
    "CREATE INDEX head_by_number ON case_head (number)",
    "CREATE INDEX head_by_machine ON case_head (machine_key, place)",
    "CREATE INDEX head_by_status ON case_head (status, place)",
    """CREATE VIRTUAL TABLE case_text USING fts5 (
        tag, plate, words, content='case_head', content_rowid='place',
        tokenize="unicode61 remove_diacritics 2", prefix='1 2 3')""",
    """CREATE TRIGGER head_added AFTER INSERT ON case_head BEGIN
        INSERT INTO case_text (rowid, tag, plate, words)
        VALUES (new.place, new.tag, new.plate, new.words); END""",
    """CREATE TRIGGER head_gone AFTER DELETE ON case_head BEGIN
        INSERT INTO case_text (case_text, rowid, tag, plate, words)
        VALUES ('delete', old.place, old.tag, old.plate, old.words); END""",
    """CREATE TABLE outcome (
        case_id TEXT PRIMARY KEY,
        kind TEXT NOT NULL,
        power_w REAL,
        complaint TEXT NOT NULL,
        found TEXT NOT NULL,
        confirmed TEXT NOT NULL,
        readings INTEGER NOT NULL,
        minutes REAL,
        odds TEXT NOT NULL,
        observations TEXT NOT NULL) WITHOUT ROWID""",
)

# A large merge adds entries first and folds their cases later; ``stale`` names the
# cases in between, so that a merge that was cut short is finished at the next opening.
_MERGING = (
    "CREATE TABLE stale (case_id TEXT PRIMARY KEY) WITHOUT ROWID",
    """CREATE TABLE taken_in (
        taken_utc TEXT NOT NULL, source TEXT NOT NULL, entries INTEGER NOT NULL,
        new INTEGER NOT NULL, refused INTEGER NOT NULL)""",
    "DROP TABLE outcome",
    """CREATE TABLE outcome (
        case_id TEXT PRIMARY KEY,
        closed_utc TEXT NOT NULL,
        kind TEXT NOT NULL,
        power_w REAL,
        complaint TEXT NOT NULL,
        found TEXT NOT NULL,
        confirmed TEXT NOT NULL,
        readings INTEGER NOT NULL,
        minutes REAL NOT NULL,                 -- at work on it; long gaps left out
        odds TEXT NOT NULL,                    -- as shown last before it was closed
        observations TEXT NOT NULL) WITHOUT ROWID""",
)

MIGRATIONS: Final = (
    Migration(version=1, name="the log, the list of cases and its search", statements=_LOG + _HEADS),
    Migration(version=2, name="merging in the background, outcomes", statements=_MERGING, rebuild=True),
)
VERSION: Final = MIGRATIONS[-1].version
