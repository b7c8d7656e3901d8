"""Certificates of bounds: one file a kind, each deriving its bound again from the trial and multipliers.

A kind says for which aims it speaks (`AIMS`) and has `derive(case, multipliers) -> Claim`. A new kind
is a new file and a line in `KINDS`.
"""

from __future__ import annotations

from types import ModuleType

from search.proof.certificates import (
    by_meets,
    by_pairs,
    exhaustion,
    first_order,
    local_spectral,
    normalised,
    replication,
    trace_root,
)

KINDS: dict[str, ModuleType] = {
    "first order": first_order,
    "replication": replication,
    "trace root": trace_root,
    "second moment by pairs": by_pairs,
    "second moment by block meets": by_meets,
    "local spectral": local_spectral,
    "normalised moment": normalised,
    exhaustion.KIND: exhaustion,
}
"""What a certificate's "kind" may say."""
