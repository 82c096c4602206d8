"""What the types found, told in the user's words: what stands there, what could, what to do.

Knows the words for each kind of fault; does not know lines: load.py adds them.
"""

from collections.abc import Mapping
from typing import Any, Final

from pydantic import BaseModel
from pydantic_core import ErrorDetails

from filmfit.errors import nearest
from filmfit.runfile.fault import Fault, Key, shown
from filmfit.runfile.keys import LATER_KEYS, LATER_VALUES, RUN_ID, TAGS, Content
from filmfit.runfile.spelled import Written, spellings

ALLOWED: Final = {
    "float_type": "a number",
    "int_type": "a whole number",
    "int_from_float": "a whole number",
    "bool_type": "true or false",
    "string_type": "a text in quotes",
    "string_too_short": "a text that is not empty",
    "finite_number": "a finite number",
    "date_type": "a date without quotes, as 2026-04-17",
    "tuple_type": "a list in [ ]",
    "model_type": "one table",
    "dict_type": "a table of keys",
    "too_long": "two numbers in [ ]",
}
BOUNDS: Final = {"greater_than": ("gt", "more than"), "greater_than_equal": ("ge", "at least"),
          "less_than_equal": ("le", "at most")}  # fmt: skip


def told(details: list[ErrorDetails], written: Mapping[Key, Written]) -> list[Fault]:
    """Return the faults that the types found, in the words and keys of the user.

    Args:
        details: what pydantic found.
        written: by inside key, the key and value as the user wrote them.
    """
    telling = [detail for detail in details if not (detail["type"] == "too_short" and detail["input"])]
    return [_fault(detail, written) for detail in telling or details]


def _fault(detail: ErrorDetails, written: Mapping[Key, Written]) -> Fault:
    """Return one fault of the types."""
    key: Key = tuple(part for part in detail["loc"] if part not in TAGS)
    asked = written.get(key, Written(key, detail["input"]))
    key, given = asked.key, asked.value
    kind, last, context = detail["type"], str(key[-1]) if key else "", detail.get("ctx", {})
    if kind == "missing":
        if isinstance(key[-1], int):
            return Fault(key[:-1], "a list that is too short", ALLOWED["too_long"])
        return Fault(key, "is missing", do=f"add {last}")
    if kind == "extra_forbidden":
        return _unknown(key, last)
    if kind == "literal_error":
        later = " is not supported yet" if isinstance(given, str) and given in LATER_VALUES.get(last, ()) else ""
        return Fault(key, f"{shown(given)}{later}", str(context["expected"]))
    if kind == "string_pattern_mismatch":
        words = "letters, digits, '.', '_' and '-', a letter or digit first"
        return Fault(key, shown(given), words if context["pattern"] == RUN_ID else ALLOWED["string_too_short"])
    if kind == "value_error":
        return Fault(key, detail["msg"].removeprefix("Value error, "))
    if kind in BOUNDS:
        name, words = BOUNDS[kind]
        return Fault(key, shown(given), f"{words} {context[name]:g}")
    if kind == "tuple_type" and isinstance(given, dict):
        return Fault(key, f"a single [{last}] table", f"[[{last}]] blocks", f"write [[{last}]]")
    if kind == "model_type" and isinstance(given, list):
        return Fault(key, "a list of tables", f"one [{last}] table", f"write [{last}]")
    if kind == "float_type" and isinstance(given, int) and not isinstance(given, bool):
        return Fault(key, shown(given), ALLOWED["finite_number"])
    return Fault(key, shown(given), ALLOWED.get(kind) or detail["msg"].removeprefix("Input should be ").lower())


def _unknown(key: Key, last: str) -> Fault:
    """Return the fault of a key that no table of this name holds."""
    if last in LATER_KEYS:
        return Fault(key, "is not supported yet", do="leave it out")
    if "parameters" in key[:-2]:
        name = ".".join(str(part) for part in key[key.index("parameters") + 1 :])
        hint = nearest(last, _known(key[:-1])) or f"write a parameter's name in quotes: '{name}'"
        return Fault(key, "unknown key", do=hint)
    known = _known(key[:-1])
    hint = nearest(last, known)
    return Fault(key, "unknown key", "" if hint else ", ".join(known), hint)


def _known(at: Key) -> list[str]:
    """Return the keys that a table may hold, in all the units that are understood."""
    model: type[BaseModel] = Content
    for part in at:
        field = model.model_fields.get(part) if isinstance(part, str) else None
        model = (_model_of(field.annotation) if field is not None else None) or model
    known = list(model.model_fields)
    own_table = len([part for part in at if isinstance(part, str)]) == 1
    return known + [key for key in spellings(str(at[0])) if key not in known] if own_table else known


def _model_of(annotation: Any) -> type[BaseModel] | None:
    """Return the table's model inside an annotation such as tuple[Layer, ...] or float | Value."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for inner in getattr(annotation, "__args__", ()):
        found = _model_of(inner)
        if found is not None:
            return found
    return None
