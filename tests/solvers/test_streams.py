"""Random streams: seeded as published, and each run has its own."""

from __future__ import annotations

from search.solvers.streams import GOLDEN, _mixed, stream


def test_the_seeding_is_the_published_one() -> None:
    """splitmix64 from 0 begins with these numbers (widely published, from memory)."""
    first = [_mixed(i * GOLDEN) for i in (1, 2, 3)]
    assert first == [0xE220A8397B1DCDAF, 0x6E789E6AA1B965F4, 0x06C45D188009454F]


def test_every_run_of_every_seed_has_a_stream_of_its_own() -> None:
    """Neither neighbouring seeds nor neighbouring runs share one, nor those before the first run."""
    states = {tuple(stream(seed, run).tolist()) for seed in range(-2, 30) for run in range(-3, 30)}
    assert len(states) == 32 * 33


def test_a_stream_is_the_same_each_time() -> None:
    """A stream belongs to a seed and a run, and to nothing else."""
    assert stream(5, 2).tolist() == stream(5, 2).tolist()
    assert stream(2**80, 2).dtype == "uint64"
