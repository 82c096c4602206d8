"""What filmfit refuses, as data: where, what was found, what is allowed, what to do.

Knows how a refusal is worded; does not know who raises it.

    FilmfitError            one fault, one line
    ├── UsageError          the command line
    ├── RunFileError        a key or value of a run file
    ├── SpectrumError       a spectrum file or its numbers
    ├── MaterialError       a material file or name
    └── RecordsError        the deposition records
    Faults                  several FilmfitErrors found in one pass
"""

from collections.abc import Iterable


class FilmfitError(Exception):
    """One fault that a user can cause, told in one line.

    Args:
        where: file, line and key, command option or record, as far as known.
        found: what stands there.
        allowed: what could stand there; empty where there is nothing to list.
        do: the user's next step; empty where `allowed` says it all.
    """

    def __init__(self, where: str, found: str, allowed: str = "", do: str = "") -> None:
        super().__init__(where, found, allowed, do)
        self.where = where
        self.found = found
        self.allowed = allowed
        self.do = do

    def __str__(self) -> str:
        parts = [self.found]
        if self.allowed:
            parts.append(f"allowed: {self.allowed}")
        if self.do:
            parts.append(self.do)
        return " ".join(f"{self.where}: {'; '.join(parts)}".split())

    def as_dict(self) -> dict[str, str]:
        """Return the four parts by name, as the result's `error` object shows them."""
        return {"where": self.where, "found": self.found, "allowed": self.allowed, "do": self.do}


class UsageError(FilmfitError):
    """A command line that cannot be carried out."""


class RunFileError(FilmfitError):
    """A run file with a key or value that cannot be used."""


class SpectrumError(FilmfitError):
    """A spectrum file that cannot be read, or numbers in it that cannot be measured R or T."""


class MaterialError(FilmfitError):
    """A material that is unknown, or a material file that is not complete."""


class RecordsError(FilmfitError):
    """Deposition records that cannot be opened, read or written."""


class Faults(Exception):  # noqa: N818 - the word says that there are several
    """Several faults found in one pass over one input.

    Args:
        errors: the faults, in the order of the input; at least one.
    """

    def __init__(self, errors: Iterable[FilmfitError]) -> None:
        self.errors = tuple(errors)
        super().__init__(self.errors)

    def __str__(self) -> str:
        return "\n".join(str(error) for error in self.errors)


def nearest(word: str, known: Iterable[str]) -> str:
    """Return a hint that names the known word nearest to a mistyped one, or an empty string.

    Args:
        word: what the user wrote.
        known: the words that are allowed.
    """
    from difflib import get_close_matches  # only on the way to an error: start-up stays instant

    close = get_close_matches(word, list(known), n=1, cutoff=0.6)
    return f"did you mean '{close[0]}'?" if close else ""
