"""What a run file's keys must agree on among each other.

Knows which keys exclude, need or repeat each other; does not check single values: keys.py does. It looks at the raw
tables, so that its faults are told beside those of single values, each with its key.
"""

from collections.abc import Iterator
from typing import Any

from filmfit.errors import nearest
from filmfit.result import Results
from filmfit.runfile.fault import Fault, shown

KINDS = ("material", "like", "model", "laws")
PAIRS = (
    ("sheet_resistance_sigma", "sheet_resistance_ohm"),
    ("effective_mass_sigma", "effective_mass"),
)


def contradictions(raw: dict[str, Any]) -> Iterator[Fault]:
    """Yield every disagreement between the keys of a run file.

    Args:
        raw: the file's tables, as TOML gives them; nothing is taken for granted about their types.
    """
    if "format" in raw and raw["format"] == 1 and type(raw["format"]) is not int:
        yield Fault(("format",), shown(raw["format"]), "1")
    yield from _layers(_list(raw.get("layer")))
    substrate = _table(raw.get("substrate"))
    if substrate:
        yield from _plate(substrate)
    for number, one in enumerate(_list(raw.get("spectrum"))):
        back = substrate.get("back", "bare")
        if one.get("side") == "substrate" and back in ("blackened", "index-matched"):
            yield Fault(("spectrum", number, "side"), f"\"substrate\" with back = \"{back}\"", '"film"',
                        "no light enters through that face")  # fmt: skip
    electrical = _table(raw.get("electrical"))
    for sigma, value in PAIRS:
        if sigma in electrical and value not in electrical:
            yield Fault(("electrical", sigma), f"stands without {value}", do=f"add {value}, or leave it out")
    for name in _table(raw.get("limits")):
        if name not in Results.model_fields:
            hint = nearest(name, Results.model_fields)
            yield Fault(("limits", name), "no such result", "" if hint else ", ".join(Results.model_fields), hint)


def _layers(layers: list[dict[str, Any]]) -> Iterator[Fault]:
    """Yield what is wrong between layers, and between the keys of one."""
    names: set[str] = set()
    main = None
    for number, layer in enumerate(layers):
        given = [key for key in KINDS if layer.get(key) not in (None, [], "")]
        if len(given) != 1:
            yield Fault(("layer", number), "has " + (" and ".join(given) or "none of material, like, model, laws"),
                        "one of material, like, model, laws")  # fmt: skip
        elif given == ["material"] and layer.get("parameters"):
            yield Fault(("layer", number, "parameters"), "stands beside material, which fixes the layer",
                        do="use like = ... to fit it")  # fmt: skip
        name = layer.get("name")
        if isinstance(name, str):
            if name in names:
                yield Fault(("layer", number, "name"), f"a second layer '{name}'", do="give each layer its own name")
            names.add(name)
        if layer.get("main") is True:
            if main is not None:
                yield Fault(("layer", number, "main"), f"layer[{main + 1}] is main already", do="keep one of them")
            else:
                main = number


def _plate(substrate: dict[str, Any]) -> Iterator[Fault]:
    """Yield a plate that nothing is known of."""
    spectra = _list(substrate.get("spectrum"))
    if "material" not in substrate and not any(one.get("quantity") == "T" for one in spectra):
        yield Fault(("substrate",), "neither a material nor the bare plate's own T",
                    do="add material = \"...\", or a [[substrate.spectrum]] of T")  # fmt: skip


def _table(found: Any) -> dict[str, Any]:
    """Return a table, or an empty one where something else stands: the types tell that."""
    return found if isinstance(found, dict) else {}


def _list(found: Any) -> list[dict[str, Any]]:
    """Return the tables of an array; what is no table is an empty one, so that numbers stay right."""
    return [_table(one) for one in found] if isinstance(found, list) else []
