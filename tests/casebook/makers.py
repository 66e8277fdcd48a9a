"""Hypothesis strategies: entries as several people on several machines would write them."""

import math
from datetime import UTC, datetime, timedelta

from hypothesis import strategies as st

from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Value
from casebook import bodies as b
from casebook.entry import Entry, clean_text, id_from_content, make_entry

START = datetime(2026, 3, 2, 6, 0, tzinfo=UTC)
words = st.text(max_size=30).map(clean_text)
names = st.from_regex(r"[a-z][a-z_]{0,15}", fullmatch=True)
persons = st.sampled_from(["Ada", "Bo", "Cy", "Dé", "技師"])
finite = st.floats(min_value=1e-6, max_value=1e9)


@st.composite
def values(draw):
    kind = draw(st.sampled_from(["exact", "open", "above", "missing", "range"]))
    number = {"open": math.inf, "missing": math.nan}.get(kind) or draw(finite)
    high = number * 2 if kind == "range" else None
    return Value(text=draw(words), number=number, unit="ohm", resolution=0.1, kind=kind, high=high)


@st.composite
def readings(draw):
    return Reading(
        measure=draw(names),
        state=draw(st.sampled_from(["isolated", "loaded", "some_new_state"])),
        values=tuple(draw(st.lists(values(), min_size=1, max_size=3))),
        temperature=draw(st.none() | values()),
        note=draw(st.none() | words),
    )


@st.composite
def sheets(draw):
    machine = Machine(
        kind=draw(names),
        tag=draw(st.none() | words.filter(bool)),
        nameplate=Nameplate(power=draw(st.none() | values()), duty=draw(st.none() | words)),
        starter=draw(st.none() | names),
        brake=draw(st.none() | st.booleans()),
    )
    return CaseSheet(
        machine=machine,
        complaint=draw(names),
        readings=tuple(draw(st.lists(readings(), max_size=4))),
        observations=draw(st.dictionaries(names, st.booleans(), max_size=4)),
        kit=draw(st.none() | st.lists(names, max_size=3).map(tuple)),
    )


plain_json = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**53), 2**53)
    | st.floats(allow_nan=False, allow_infinity=False)
    | words,
    lambda inside: st.lists(inside, max_size=3) | st.dictionaries(names, inside, max_size=3),
    max_leaves=6,
)
some_bodies = st.one_of(
    st.builds(b.Opened, kind=names, complaint=names, tag=st.none() | words),
    st.builds(b.Note, text=words),
    st.builds(b.Observed, observation=names, answer=st.none() | st.booleans()),
    st.builds(b.ReadingTaken, reading=readings()),
    st.builds(b.Closed, found=names, confirmed=st.sampled_from(["teardown", "repair", "believed"])),
    st.builds(b.Reopened, why=words),
    st.builds(b.Skipped, observation=names, why=words),
    st.builds(b.Words, data=st.dictionaries(names, plain_json, max_size=3)),
)


@st.composite
def entry_sets(draw, cases: int = 3, most: int = 14) -> list[Entry]:
    """Entries of a few cases; times jump both ways, ``after`` and corrections point anywhere."""
    entries: list[Entry] = []
    for place in range(draw(st.integers(1, most))):
        case = id_from_content("case", str(draw(st.integers(1, cases))))
        mine = [entry.id for entry in entries if entry.case == case]
        anywhere = st.sampled_from([*mine, id_from_content("nowhere")])
        body = draw(some_bodies)
        if mine and draw(st.integers(0, 3)) == 0:
            body = b.Correction(
                names=draw(anywhere), instead=draw(st.none() | st.just({"text": "so"})), why="slip"
            )
        entries.append(
            make_entry(
                body,
                case=case,
                person=draw(persons),
                after=draw(st.none() | anywhere),
                at=START + timedelta(seconds=draw(st.integers(-5, 5))),
                entry_id=id_from_content("entry", str(place), case),
                kind="of_a_later_program" if isinstance(body, b.Words) else None,
            )
        )
    return entries
