"""Why a trial is impossible, told in the words of its file, and what to relax."""

from __future__ import annotations

import time

from search.foundation.errors import Clash, Impossible
from search.solvers import clash, relaxing
from search.trial.lines import FRAME, place, quoted
from search.trial.records import Said, Trial

USUAL_SECONDS = 10.0
SHARE_FOR_CLASHES = 0.6
"""Part of the time that finding the clashes may take; the rest is for what to relax."""


def explained(
    trial: Trial, error: Impossible, *, seconds: float = USUAL_SECONDS, seed: int = 1
) -> Impossible:
    """The same verdict with the clashing lines and what to relax.

    Parameters
    ----------
    trial : a trial that was shown to be impossible
    error : how that was told
    seconds : wall time for the explanation
    seed : of the greedy builder and the rule solver
    """
    questions = clash.Questions(time.monotonic() + SHARE_FOR_CLASHES * seconds, seed)
    found = clash.find_clashes(trial, questions)
    questions.until = time.monotonic() + (1 - SHARE_FOR_CLASHES) * seconds
    told = []
    for one in found:
        others = [other for other in found if other is not one]
        changes = relaxing.changes(trial, one, others, questions)
        told.append(
            Clash(
                lines=tuple(_line(trial, said) for said in one.lines),
                among=tuple(_line(trial, said) for said in trial.said if said.sort in FRAME),
                is_smallest=one.is_smallest,
                cause=one.cause,
                shown_by=one.shown_by,
                changes=tuple(dict.fromkeys(relaxing.in_words(trial, change) for change in changes)),
            )
        )
    return Impossible(error.causes, error.shown_by, told)


def _line(trial: Trial, said: Said) -> tuple[str, int, str]:
    text = quoted(trial, said)
    return said.key, said.line, text if said.line else f"{text} ({place(trial, said)})"
