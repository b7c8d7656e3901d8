"""Commands that die at any moment leave a whole store, no lost or doubled run, and whole plans or none."""

from __future__ import annotations

import multiprocessing
import time
from pathlib import Path

import pytest

from tests.cli.killing import Field

pytestmark = pytest.mark.skipif(
    "forkserver" not in multiprocessing.get_all_start_methods(),
    reason="there is no SIGKILL, and no process group",
)


def killed(field: Field, kills: int, at_once: int) -> Field:
    """Commands killed so often; all that must hold was looked at after every round."""
    field.measure()
    while field.kills < kills:
        field.round(at_once)
    field.finish()
    return field


def test_a_few_kills_lose_nothing(tmp_path: Path) -> None:
    """Six kills over plans and sweeps that share a store."""
    assert killed(Field(tmp_path, seed=1, workers=(1,)), kills=6, at_once=2).kills >= 6


@pytest.mark.slow
def test_five_hundred_kills_lose_nothing(tmp_path: Path) -> None:
    """The same five hundred times; commands that end before they are killed must have ended well."""
    began = time.monotonic()
    field = killed(Field(tmp_path, seed=2), kills=500, at_once=6)
    print(
        f"{field.kills} kills and {field.ended} that ended first in {time.monotonic() - began:.0f} s, "
        f"{len(field.seen)} runs in the store"
    )
    assert field.ended > 20
