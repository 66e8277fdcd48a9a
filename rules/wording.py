"""What Plateside never says: no permission, no all-clear, no dangerous thing to do."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Final

import msgspec

from rules.decoding import Steps

_SWITCHED: Final = (
    r"(?:energi[sz]ed|(?:re-?)?started|switched (?:back )?on|re-?closed|reset|run|operated|touched"
    r"|put back|returned|left (?:on|running|in service))"
)
_SWITCH: Final = r"(?:energi[sz]e|(?:re-?)?start|re-?close|reset|run|use|operate|switch|touch|go|open)"
_MACHINE: Final = r"(?:motor|machine|winding|insulation|bearing|everything)"
_GUARDED: Final = r"(?:contacts?|switch|interlock|relay|protector|guard|stop|thermistors?)"

NEVER: Final[dict[str, tuple[str, ...]]] = {
    "an all-clear": (
        r"safe(?:ly)?",
        r"(?<!prove )(?<!proved )(?<!proving )(?<!prove it )dead",
        r"good",
        r"all[- ]clear",
        rf"{_MACHINE} (?:is|are|looks) (?:ok|okay|fine|sound)",
        r"harmless|risk-free|(?:no|without) (?:risk|danger)",
        r"(?:healthy|sound) (?:motor|machine)[,;:] (?:run|start|energi[sz]e|switch)",
    ),
    "a permission": (
        r"(?:ok|okay|fine) to",
        rf"(?:clear|cleared|ready|free|fit) to (?:be )?(?:{_SWITCH}|{_SWITCHED})",
        r"(?:ready|fit) for (?:service|use|operation)",
        rf"(?:may|can|could) (?:now |again )*be {_SWITCHED}",
        r"(?:is|are) (?:allowed|permitted|authori[sz]ed|cleared) to|allowed to be energi[sz]ed",
        rf"you (?:can|may|could) (?:now |again )*{_SWITCH}",
        r"go ahead",
        r"(?:leave|keep|put|return|take) (?:it |the \w+ )?(?:back )?(?:in|into|to) service",
        r"run it (?:on|again|anyway)",
    ),
    "a way round a protection": (
        r"by-?pass\w*",
        r"jumper\w*",
        rf"(?:bridg(?:e|ing)|link|short|wire|strap) (?:out|over|across|round|the {_GUARDED})",
        rf"(?:defeat|disable|override|ignore|skip) the (?:{_GUARDED}|gate|list|cautions?|lock)",
        r"hold(?:ing)? (?:in )?the contactor|contactor held in|(?:push|press|force) the contactor",
        r"(?:raise|increase|turn up|dial up|widen) (?:the|its) (?:overload|relay|setting|trip|dial)",
        r"set the relay (?:higher|up)|(?:larger|bigger|stronger) fuses?",
        r"no need to (?:isolate|lock|prove|discharge|measure|test)",
        r"(?:replace|renew) the fuses? and (?:try|switch|start|re-?close)",
        r"re-?close it (?:and|to)|reset it and",
    ),
    "a dangerous thing to do": (
        r"turn (?:it|the (?:shaft|rotor|motor)) by hand (?:while|with the power|when energi)",
        r"spin(?:ning)? (?:it|the (?:shaft|rotor|motor)) by hand",
        r"(?:help|flick|kick) the (?:shaft|rotor|motor|belt|fan)|give (?:it|the shaft) a (?:spin|push|kick)",
        r"open the (?:shunt )?field",
        r"(?:lift|disconnect|break|remove) (?:the|a|one) (?:shunt )?field (?:lead|wire|fuse) (?:while|under)",
        r"open (?:an?|the) (?:(?:explosion|flame)-?(?:proof|protected)|Ex\b)",
    ),
    "a class of arc flash": (r"(?:arc[- ]flash|PPE|hazard[- /]risk) (?:category|level)", r"cal/cm\w*"),
}
"""Patterns of what no text says, by what it would be; each begins and ends at the edge of a word."""

_NEVER: Final = re.compile(
    "|".join(rf"\b(?:{pattern})(?!\w)" for patterns in NEVER.values() for pattern in patterns), re.IGNORECASE
)


def unwanted(text: str) -> tuple[str, ...]:
    """Return the words of a text that Plateside never says."""
    return tuple(found.group(0) for found in _NEVER.finditer(text))


def texts_in(part: object, path: Steps = ()) -> Iterator[tuple[Steps, str]]:
    """Yield every text inside a rule or an answer, with its path."""
    if isinstance(part, str):
        yield path, part
    elif isinstance(part, msgspec.Struct):
        for name in part.__struct_fields__:
            yield from texts_in(getattr(part, name), (*path, name))
    elif isinstance(part, dict):
        for key, value in part.items():
            yield from texts_in(value, (*path, str(key)))
    elif isinstance(part, list | tuple):
        for index, value in enumerate(part):
            yield from texts_in(value, (*path, index))
