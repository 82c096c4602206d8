"""Single values of a TOML file as text, word, number or block; every fault names the file and the key.

Knows kinds of values; does not know what any key means.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from filmfit.errors import MaterialError, nearest

LARGEST = 1e300


@dataclass(frozen=True)
class TomlValues:
    """Checks the values of one material file.

    Args:
        file: its name, as errors show it.
    """

    file: str

    def fault(self, key: str, found: str, allowed: str = "", do: str = "") -> MaterialError:
        """Return the error that names the file and the key."""
        return MaterialError(f"{self.file}: {key}", found, allowed, do)

    def known(self, stem: str, block: Iterable[str], keys: tuple[str, ...]) -> None:
        """Refuse a key that is not one of `keys`; `stem` stands before it in the error."""
        for key in block:
            if key not in keys:
                raise self.fault(f"{stem}{key}", "unknown key", ", ".join(keys), nearest(key, keys))

    def block(self, key: str, value: object) -> dict[str, Any]:
        """Return a value that is a table of keys."""
        if not isinstance(value, dict):
            raise self.fault(key, f"{value!r:.40}", "a table of keys")
        return value

    def text(self, key: str, value: object) -> str:
        """Return a value that is a text with something in it."""
        if not isinstance(value, str) or not value.strip():
            raise self.fault(key, "missing or empty", "a text")
        return value

    def word(self, key: str, value: object, words: tuple[str, ...]) -> str:
        """Return a value that is one of some words."""
        text = self.text(key, value)
        if text not in words:
            raise self.fault(key, f"'{text}'", ", ".join(words))
        return text

    def number(self, key: str, value: object) -> float:
        """Return a value that is a finite number."""
        if isinstance(value, bool) or not isinstance(value, int | float) or not abs(value) <= LARGEST:
            raise self.fault(key, "missing" if value is None else f"{value!r:.40}", "a finite number")
        return float(value)

    def positive(self, key: str, value: object) -> float:
        """Return a value that is a finite number above 0."""
        number = self.number(key, value)
        if number <= 0:
            raise self.fault(key, f"{number:g}", "greater than 0")
        return number
