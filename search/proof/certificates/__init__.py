"""Certificates of bounds: one file a kind, each deriving its bound again from the trial and multipliers.

A kind says for which aims it speaks (`AIMS`) and has `derive(case, multipliers) -> Claim`. A new kind
is a new file and a line in `KINDS`.
"""

from __future__ import annotations

from types import ModuleType

from search.proof.certificates import (
    averaged,
    by_meets,
    by_pairs,
    control_meets,
    control_row,
    even_by_meets,
    even_by_pairs,
    exhaustion,
    first_order,
    local_spectral,
    normalised,
    replication,
    shorted_pair,
    trace_root,
)

KINDS: dict[str, ModuleType] = {
    "first order": first_order,
    "replication": replication,
    "trace root": trace_root,
    "second moment by pairs": by_pairs,
    "second moment by block meets": by_meets,
    "even meetings by pairs": even_by_pairs,
    "even meetings by block meets": even_by_meets,
    "shorted pair": shorted_pair,
    "local spectral": local_spectral,
    "normalised moment": normalised,
    "averaged information": averaged,
    "second moment against controls": control_meets,
    "all pairs and the control's own row": control_row,
    exhaustion.KIND: exhaustion,
}
"""What a certificate's "kind" may say."""

OF_ANY_FILLING = frozenset({"first order", "replication", "trace root"})
"""Kinds that hold however many plots stay filler; the others count with blocks that are planted in full."""
KNOW_RANDOM_BLOCKS = frozenset(
    {
        "first order",
        "replication",
        "trace root",
        "second moment by pairs",
        "second moment by block meets",
        "even meetings by pairs",
        "even meetings by block meets",
    }
)
"""Kinds that also hold where blocks are random; the others speak of C, and C(γ) tells more than that."""
