"""Blind packets: treatments under codes that say nothing, and the key that undoes them."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from typing import Any

import numpy as np

from search.trial.records import Aim, Replicate, Rules, Treatment, Trial

LETTERS = "CDFHJKMNPQRTWXY"
"""No letter that another could be taken for, and no vowel that could make a word."""
STREAM = 2
"""Apart from the streams of the layout and of further sites."""
HIDDEN = "hidden in a blind packet; the plan file in the office has it"

Document = dict[str, Any]


def blind_codes(t: int, seed: int) -> tuple[str, ...]:
    """A code for each treatment, drawn at random: a letter and at least two digits.

    Parameters
    ----------
    t : number of treatments
    seed : seed of the layout; the same seed gives the same codes
    """
    digits = 10 if 3 * t <= 90 * len(LETTERS) else 1000
    codes = [f"{letter}{number}" for letter in LETTERS for number in range(digits, 10 * digits)]
    random = np.random.default_rng([seed, STREAM])
    return tuple(codes[at] for at in random.choice(len(codes), t, replace=False).tolist())


def blinded(trial: Trial, document: Document) -> tuple[Trial, Document]:
    """Trial and plan as the crew may see them: codes for names, in the order of the codes.

    Controls, amounts and rules are left out, since they tell treatments apart; cautions stay.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json, checked against the trial already
    """
    codes = blind_codes(trial.t, document["layout"]["seed"])
    code_of: dict[str | None, str | None] = {
        treatment.name: code for treatment, code in zip(trial.treatments, codes, strict=True)
    }
    code_of[None] = None  # filler stays filler
    plots = [{**plot, "treatment": code_of[plot["treatment"]]} for plot in document["plots"]]
    count = Counter(plot["treatment"] for plot in plots)
    shown = [
        Treatment(code, count[code], count[code], own_range=True, caution=treatment.caution)
        for treatment, code in zip(trial.treatments, codes, strict=True)
    ]
    order = sorted(codes)
    hidden = replace(
        trial,
        treatments=tuple(sorted(shown, key=lambda treatment: treatment.name)),
        rules=Rules(
            replicates=tuple(Replicate(group.name, group.blocks) for group in trial.rules.replicates),
            per_replicate=(),
            twice_in_block=True,
            planted=tuple(replace(x, treatment=order.index(codes[x.treatment])) for x in trial.rules.planted),
        ),
        aim=Aim(),
    )
    blocks = {name: [code_of[held] for held in inside] for name, inside in document["blocks"].items()}
    layout = {"seed": document["layout"]["seed"], "scheme": HIDDEN}
    return hidden, {**document, "plots": plots, "blocks": blocks, "layout": layout}
