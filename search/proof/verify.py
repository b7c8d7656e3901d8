"""One plan file, proved again from its own text: counts, rules, plots, score, bound, gap and standing."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

from search.foundation.errors import Impossible
from search.proof import neighbours, plots, reading, rules, score, stamp, standing
from search.proof.bound import bounded
from search.proof.certificates.case import case_of
from search.proof.information import information
from search.proof.parts import Part
from search.proof.records import Finding, Refuted, Verdict
from search.proof.truth import truth
from search.trial.records import Contents, Trial


def verify(document: Any, exhaust: bool = False) -> Verdict:
    """Prove every claim of a plan file, in exact arithmetic and without trust in whoever wrote it.

    Parameters
    ----------
    document : the JSON of the file as Python data
    exhaust : repeat a proof by exhaustion too, which may take minutes

    Returns
    -------
    Verdict : a finding for each claim; the plan is proved where all of them hold

    Raises
    ------
    BadInput : the document is no plan file at all
    """
    file = reading.opened(document)
    proof = _Proof()
    proof.step("seal", lambda: stamp.sealed(file))
    proof.step("mark", lambda: stamp.marked(file))
    proof.step("layout", lambda: stamp.laid_out(file))
    proof.step("ended by", lambda: stamp.ended(file))
    proof.step("provenance", lambda: stamp.provenance(file))
    proof.step("trial and blocks", lambda: _planting(file, proof, exhaust))
    return Verdict(tuple(proof.findings))


def verify_file(path: Path) -> Verdict:
    """Prove every claim of a plan file on disk.

    Raises
    ------
    BadInput : the file cannot be read, or is no plan file at all
    """
    return verify(reading.document_of(path))


class _Proof:
    """Findings as they are made; a step that is refuted leaves its sentence and the next one begins."""

    def __init__(self) -> None:
        self.findings: list[Finding] = []

    def step(self, what: str, prove: Callable[[], Finding | None]) -> bool:
        """Take one step, which may make findings of its own instead; True where it holds."""
        try:
            finding = prove()
        except Refuted as refuted:
            finding = Finding(what, False, str(refuted))
        if finding is not None:
            self.findings.append(finding)
        return finding is None or finding.ok


def _planting(file: Part, proof: _Proof, exhaust: bool) -> None:
    """Trial, blocks and plots; what is claimed of them is proved only where the counts are right."""
    trial = reading.trial_of(file)
    contents = reading.contents_of(file, trial)
    counts = proof.step("counts", lambda: rules.counted(trial, contents))
    if not counts:
        return
    proof.step("rules", lambda: rules.obeyed(trial, contents))
    placed = proof.step("plots", lambda: plots.planted(trial, contents, reading.plots_of(file, trial)))
    if placed:
        proof.step("neighbours", lambda: neighbours.kept_apart(trial, reading.plots_of(file, trial)))
    proof.step("score", lambda: _claims(file, trial, contents, proof, exhaust))


def _claims(file: Part, trial: Trial, contents: Contents, proof: _Proof, exhaust: bool) -> None:
    """Score, meetings, bound, gap and standing."""
    try:
        case = case_of(trial)
    except Impossible as clash:
        raise Refuted(f"no plan can obey the trial's own counts: {clash}") from clash
    plan = information(contents, trial.t, trial.blocks_random)
    real = truth(trial, plan)
    claims = file.part("score")
    proof.findings.extend(score.compared(claims, real, case.aim))
    proof.step("meetings", lambda: score.met(claims.part("meetings"), case, plan))

    exact: Fraction | None = None

    def prove_bound() -> None:
        nonlocal exact
        findings, exact = bounded(file.value("bound"), case, exhaust)
        proof.findings.extend(findings)

    if proof.step("bound", prove_bound):
        proof.step("gap", lambda: standing.gap_told(file, case, real, exact))
        proof.step("standing", lambda: standing.standing_told(file, case, plan, real, exact))
