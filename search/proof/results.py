"""One kept result, proved again from its own text: problem, plan, score and bound; names are not needed.

A result speaks of its problem by the canonical text, so that is what the trial is built from. What cannot
be proved, such as who searched for how long, is taken as it is told, unless it contradicts the bound.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from typing import Any

from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput, EvenfieldError, Impossible, Undecided
from search.proof import rules
from search.proof.bound import bounded
from search.proof.certificates.case import Case, case_of
from search.proof.information import information
from search.proof.parts import Part, listed, quoted, told, whole
from search.proof.records import Refuted
from search.proof.score import RELATIVE
from search.proof.truth import truth
from search.trial.canonical import canonical, digest_of
from search.trial.rebuilding import rebuilt
from search.trial.records import Contents, Trial

FORMAT = "evenfield result 1"


def proved(document: Any) -> Trial:
    """The trial of a kept result, every claim of which was proved.

    Parameters
    ----------
    document : the result as JSON data, as the store exports it

    Raises
    ------
    BadInput : it is no result, or something that it claims does not hold; the message says which
    """
    try:
        canonical_json(document).encode()  # a lone surrogate or an endless number has no canonical text
    except (RecursionError, TypeError, ValueError) as error:
        raise BadInput("this is no JSON that can be written down again") from error
    try:
        return _proved(Part.of("the line", document))
    except Refuted as refuted:
        raise BadInput(str(refuted)) from refuted


def _proved(result: Part) -> Trial:
    if result.content.get("format") != FORMAT:
        found = quoted(result.content.get("format"))
        raise Refuted(f'this is no kept result: its "format" must be "{FORMAT}", found {found}')
    result = Part("", result.content)
    trial = _trial(result)
    try:
        case = case_of(trial)
    except Impossible as clash:
        raise Refuted(f"no plan can obey the problem's own counts: {clash}") from clash
    reached = [_planted(trial, plan) for plan in _plans(result)]
    bound = None
    if result.has("bound"):
        bound = _bound(result, case)
    reached += [
        _score(trial, Part.of(f"runs[{at}]", run)) for at, run in enumerate(result.items("runs"), start=1)
    ]
    if bound is not None and reached:
        if trial.aim.kind.counts_meetings and min(reached) < bound:
            raise Refuted(f"it tells of a sum of {told(min(reached))}, below its own proven bound")
        if not trial.aim.kind.counts_meetings and max(reached) > bound * (1 + RELATIVE):
            raise Refuted(f"it tells of an efficiency of {told(max(reached))}, above its own proven bound")
    return trial


def _bound(result: Part, case: Case) -> Fraction | None:
    """The bound, nothing of it taken on trust: a listing of graphs is repeated, or the bound refused."""
    try:
        findings, bound = bounded(result.value("bound"), case, exhaust=True)
    except Refuted as refuted:
        raise Refuted(f"bound: {refuted}") from refuted
    except Undecided as open_:
        raise Refuted(f"bound: its proof by exhaustion takes too long to repeat ({open_})") from open_
    taken = [finding.detail for finding in findings if finding.on_trust]
    if taken:
        raise Refuted(f"bound: {taken[0]}; a result from elsewhere is not taken on trust")
    return bound


def _trial(result: Part) -> Trial:
    text, digest = result.text("text"), result.text("digest")
    if digest_of(text) != digest:
        raise Refuted("digest is not that of its text")
    try:
        trial = rebuilt(text, result.text("aim"), result.text("trial"))
    except EvenfieldError as error:
        raise Refuted(f"text: {error}") from error
    numbering = canonical(trial)
    if numbering.complete and numbering.digest != digest:
        raise Refuted("text is not the canonical text of its problem")
    return trial


def _plans(result: Part) -> Iterator[Part]:
    if result.has("plan"):
        yield result.part("plan")
    for at, plan in enumerate(result.items("issued"), start=1):
        yield Part.of(f"issued[{at}]", plan)


def _planted(trial: Trial, plan: Part) -> Fraction:
    """The score that the plan claims and has."""
    contents = _contents(trial, plan)
    try:
        rules.counted(trial, contents)
        rules.obeyed(trial, contents)
    except Refuted as refuted:
        raise Refuted(f"{plan.where}: {refuted}") from refuted
    claimed = _score(trial, plan)
    real = truth(trial, information(contents, trial.t, trial.blocks_random)).aim
    if not real.agrees(claimed, RELATIVE):
        raise Refuted(f"{plan.at('score')} is claimed to be {told(claimed)}, but is {told(real.low)}")
    return claimed


def _score(trial: Trial, told_of: Part) -> Fraction:
    """The score of a plan or a run, which an efficiency that is told beside it only repeats."""
    score = told_of.number("score")
    if told_of.has("efficiency"):
        if trial.aim.kind.counts_meetings:
            raise Refuted(f"{told_of.at('efficiency')} must be null: the aim is judged by a whole number")
        if told_of.number("efficiency") != score:
            raise Refuted(f"{told_of.at('efficiency')} is not the score {told(score)}")
    return score


def _contents(trial: Trial, plan: Part) -> Contents:
    blocks = plan.items("contents")
    if len(blocks) != trial.b:
        raise Refuted(f"{plan.at('contents')} has {len(blocks)} blocks, the problem {trial.b}")
    return tuple(
        tuple(sorted(_treatment(trial, plan, i) for i in listed(plan.at("contents"), block)))
        for block in blocks
    )


def _treatment(trial: Trial, plan: Part, value: Any) -> int:
    number = whole(plan.at("contents"), value)
    if not 0 <= number < trial.t:
        raise Refuted(f"{plan.at('contents')} names a treatment that the problem does not have")
    return number
