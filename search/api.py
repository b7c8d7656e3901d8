"""Evenfield from Python: the main job in a few names."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from tempfile import TemporaryDirectory

from search.efficiency.bounds import best_bound
from search.efficiency.evaluator import score
from search.efficiency.records import Bound, Score
from search.foundation.errors import BadInput
from search.foundation.stopping import Limits, Observer
from search.runs.conductor import find
from search.runs.keeping import Keeping
from search.runs.plan import Plan
from search.runs.store import Store
from search.runs.sweep import SweepResult, run_sweep
from search.runs.sweep_file import read_sweep
from search.trial import records
from search.trial.checker import broken_rules
from search.trial.limits import limits as implied_limits
from search.trial.reading import read_trial, trial_from_document
from search.trial.records import Contents

USUAL_SECONDS = 20.0


@dataclass(frozen=True, slots=True)
class Trial(records.Trial):
    """A trial, with the ways to read one."""

    @classmethod
    def from_yaml(cls, path: str | Path) -> Trial:
        """The trial of a YAML file.

        Raises
        ------
        FaultyTrial : with every fault of the file
        """
        return cls._of(read_trial(path))

    @classmethod
    def from_document(cls, document: Mapping[str, object]) -> Trial:
        """The trial of plain data in the form of a trial file.

        Raises
        ------
        FaultyTrial : with every fault of the data
        """
        return cls._of(trial_from_document(dict(document)))

    @classmethod
    def _of(cls, trial: records.Trial) -> Trial:
        return cls(**{part.name: getattr(trial, part.name) for part in fields(trial)})


def plan(
    trial: records.Trial,
    *,
    seconds: float | None = None,
    moves: int | None = None,
    seed: int = 1,
    workers: int = 2,
    store: str | Path | None = None,
) -> Plan:
    """Search a plan for a trial.

    Parameters
    ----------
    trial : the trial
    seconds, moves : how far to search; 20 seconds where neither is given
    seed : the same seed gives the same plan, with a limit in moves on any clock
    workers : threads
    store : a file that keeps results and starts from them; None keeps nothing

    Raises
    ------
    Impossible : no plan obeys the rules
    Undecided : not known in the time
    BadInput : the store cannot be used
    """
    if seconds is None and moves is None:
        seconds = USUAL_SECONDS
    limits = Limits(seconds, moves)
    if store is None:
        return find(trial, limits=limits, seed=seed, workers=workers)
    with Keeping(trial, Path(store)) as keeping:
        found = keeping.plan(limits=limits, seed=seed, workers=workers, observer=Observer())
        if keeping.failure is not None:
            raise keeping.failure
        return found


def sweep(
    path: str | Path,
    *,
    workers: int = 1,
    store: str | Path | None = None,
    fresh: bool = False,
) -> SweepResult:
    """Plan every row of a sweep file; an interrupt ends it early with what it has.

    Parameters
    ----------
    path : the sweep file
    workers : rows searched at a time
    store : a file that keeps results and starts from them; None keeps nothing
    fresh : search every row anew; the better of old and new stays kept

    Returns
    -------
    result : its `.frame` is a table with a line for each row, its `.rows` hold the plans

    Raises
    ------
    FaultyTrial : the sweep file has faults
    BadInput : the store cannot be used
    """
    rows = read_sweep(path)
    with TemporaryDirectory() as folder, Store(store or Path(folder, "store.sqlite")) as kept:
        return run_sweep(rows, kept, workers=workers, fresh=fresh)


def evaluate(trial: records.Trial, blocks: Mapping[str, Sequence[str]]) -> Score:
    """How good block contents are for a trial.

    Parameters
    ----------
    trial : the trial
    blocks : for each block the names of its treatments, one a plot

    Raises
    ------
    BadInput : unknown names, or contents that break a rule
    """
    contents = _contents(trial, blocks)
    broken = broken_rules(trial, contents)
    if broken:
        raise BadInput("; ".join(broken))
    return score(trial, contents)


def bound(trial: records.Trial) -> Bound | None:
    """The best proven limit on the efficiency of any plan for a trial.

    Raises
    ------
    Impossible : the counts of the trial clash
    """
    return best_bound(trial, implied_limits(trial))


def _contents(trial: records.Trial, blocks: Mapping[str, Sequence[str]]) -> Contents:
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    names = [block.name for block in trial.blocks]
    unknown = (set(blocks) ^ set(names)) | {name for held in blocks.values() for name in held} - set(number)
    if unknown:
        raise BadInput(f"blocks and treatments must be those of the trial; at odds: {sorted(unknown)[:6]}")
    return tuple(tuple(sorted(number[name] for name in blocks[block])) for block in names)
