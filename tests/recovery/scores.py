"""How made measurements came out: figures of a group of cases, and the table a person can read."""

from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from filmfit.errors import FilmfitError
from filmfit.jobs.fit import fit_run
from tests.recovery.cases import make_case

WORKERS = 2
HEAD = "group    cases  usable  within 1 %  median error  interval holds  median width  silent  carriers hold  seconds"


@dataclass(frozen=True)
class Outcome:
    """A case and the result of its fit, None where the run file was refused."""

    case: object
    result: object

    @property
    def thickness(self):
        """Return the fitted thickness with its interval, or None."""
        got = self.result.results.thickness_nm if self.result is not None else None
        return got if got is not None and got.low is not None and got.high is not None else None

    @property
    def error(self):
        """Return the relative error, infinite where there is no answer."""
        got = self.thickness
        return abs(got.value / self.case.thickness_nm - 1) if got is not None else np.inf

    @property
    def covered(self):
        """Say whether the interval holds the truth."""
        got = self.thickness
        return got is not None and got.low <= self.case.thickness_nm <= got.high

    @property
    def usable(self):
        """Say whether the answer is sold as right."""
        return self.result is not None and self.result.answer == "usable"

    @property
    def silent(self):
        """Say whether a wrong number is sold as right: over 1 % off and by more than the interval's whole width."""
        got = self.thickness
        far = got is None or abs(got.value - self.case.thickness_nm) > got.high - got.low
        return self.usable and self.error > 0.01 and far

    @property
    def carriers(self):
        """Return for each carrier quantity whose truth is known whether its interval holds it."""
        held = []
        for name, truth in self.case.truths.items():
            got = getattr(self.result.results, name) if self.result is not None else None
            held.append(got is not None and got.low is not None and got.low <= truth <= got.high)
        return held


@dataclass(frozen=True)
class Score:
    """How a group of cases came out."""

    cases: int
    usable: float
    within_1_percent: float
    median_error: float
    covered: float
    width: float
    silent: int
    carriers: float
    seconds: float

    @classmethod
    def of(cls, outcomes):
        """Return the figures of some outcomes."""
        answered = [one for one in outcomes if one.thickness is not None]
        carriers = [held for one in outcomes for held in one.carriers]
        return cls(
            len(outcomes),
            float(np.mean([one.usable for one in outcomes])),
            float(np.mean([one.error <= 0.01 for one in outcomes])),
            float(np.median([one.error for one in outcomes])),
            float(np.mean([one.covered for one in outcomes])),
            float(np.median([(o.thickness.high - o.thickness.low) / o.case.thickness_nm for o in answered])),
            sum(one.silent for one in outcomes),
            float(np.mean(carriers)) if carriers else np.nan,
            float(np.median([one.result.fit.seconds for one in outcomes if one.result is not None])),
        )


def outcomes_of(folder, seeds):
    """Make, write and fit cases of so many seeds; the order is theirs."""
    with ProcessPoolExecutor(WORKERS) as pool:
        return list(pool.map(_outcome, [str(folder)] * len(seeds), seeds))


def _outcome(folder, seed):
    here = Path(folder) / str(seed)
    here.mkdir()
    case = make_case(here, seed)
    try:
        return Outcome(case, fit_run(here / "run.toml").result)
    except FilmfitError:
        return Outcome(case, None)


def table(outcomes):
    """Return scores by group, printed with every miss."""
    groups = {}
    for one in outcomes:
        groups.setdefault(one.case.group, []).append(one)
    scores = {name: Score.of(members) for name, members in groups.items()}
    print("\n" + HEAD)
    for name, s in scores.items():
        print(
            f"{name:8} {s.cases:5} {s.usable:7.2f} {s.within_1_percent:11.3f} {100 * s.median_error:11.2f} % "
            f"{s.covered:15.3f} {100 * s.width:11.2f} % {s.silent:7} {s.carriers:14.2f} {s.seconds:8.1f}"
        )
    for one in outcomes:
        if not one.covered and one.case.group != "blunder":
            got = one.thickness
            said = f"{got.value:.1f} ({got.low:.1f} to {got.high:.1f})" if got else "nothing"
            answer = one.result.answer if one.result is not None else "refused"
            print(f"  missed: {one.case.name}, {one.case.thickness_nm:.1f} nm: {said}, {answer}")
    return scores
