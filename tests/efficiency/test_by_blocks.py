"""Scoring a plan by way of its blocks gives what its own information matrix gives."""

from __future__ import annotations

import numpy as np
import pytest

from search.efficiency import evaluator
from search.efficiency.by_blocks import inverse_and_log
from search.efficiency.evaluator import information_matrix, log_pseudo_determinant, pseudo_inverse, score
from search.trial.reading import trial_from_document
from search.trial.tables import incidence

PLAN = ((0, 1, 2, 3, 4), (0, 5, 6, 7), (1, 5, 8, 8, 9), (2, 6, 9, 3, 7))


def test_the_inverse_and_the_determinant_are_those_of_the_treatments() -> None:
    """Unequal blocks and replications, one treatment twice in a block."""
    information = information_matrix(PLAN, 10)
    inverse, logarithm = inverse_and_log(incidence(PLAN, 10))
    np.testing.assert_allclose(inverse, pseudo_inverse(information), atol=1e-12)
    assert logarithm == pytest.approx(log_pseudo_determinant(information), abs=1e-12)


def test_a_score_is_the_same_by_either_way(monkeypatch: pytest.MonkeyPatch) -> None:
    """Every figure of it, to rounding."""
    document = {"trial": "x", "treatments": 12, "blocks": {"count": 6, "plots": 4}}
    trial = trial_from_document(document)
    plan = tuple(tuple(sorted((2 * j + i) % 12 for i in (0, 1, 2, 5))) for j in range(6))
    plainly = score(trial, plan)
    monkeypatch.setattr(evaluator, "LARGE", 0)
    by_blocks = score(trial, plan)
    assert pytest.approx(plainly.A, rel=1e-12) == by_blocks.A
    assert pytest.approx(plainly.D, rel=1e-12) == by_blocks.D
    assert by_blocks.worst_pair_efficiency == pytest.approx(plainly.worst_pair_efficiency, rel=1e-12)
    assert by_blocks.least_meetings == plainly.least_meetings
    assert by_blocks.most_meetings == plainly.most_meetings
