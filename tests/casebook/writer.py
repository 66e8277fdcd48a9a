"""Writes notes into a casebook until it is done or killed, and says after each that it is on the disk.

Run by the tests as its own process: ``python writer.py PATH PERSON COUNT``.
"""

import sys
from pathlib import Path

from casebook.bodies import Note, Opened
from casebook.book import open_casebook


def main(path: str, person: str, count: int) -> None:
    with open_casebook(Path(path)) as book:
        case = book.open_case([Opened(kind="induction_3ph", complaint="noisy", tag="P-1")], person=person)
        for place in range(count):
            (entry,) = book.record(case, Note(text=f"note {place} of {person}"), person=person)
            print(entry.id, flush=True)


if __name__ == "__main__":
    main(sys.argv[1], sys.argv[2], int(sys.argv[3]))
