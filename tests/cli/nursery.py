"""Commands in processes of their own that start at once: forked from a server that has everything loaded.

So the moments at which they are killed fall into the work of the command, not into its imports.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
from dataclasses import dataclass
from multiprocessing.context import ForkServerProcess
from pathlib import Path

from search.cli.entry import run
from tests.cli.asked import ROOT


@dataclass(frozen=True, slots=True)
class Command:
    """A running command, the leader of its own process group."""

    words: tuple[str, ...]
    process: ForkServerProcess
    out: Path
    err: Path

    def ends_within(self, seconds: float) -> bool:
        """Whether it ends by itself in the time."""
        self.process.join(max(0.0, seconds))
        return self.process.exitcode is not None

    def kill(self) -> None:
        """End it, and all that it started, at this moment."""
        pid = self.process.pid
        assert pid is not None
        try:
            os.killpg(pid, signal.SIGKILL)
        except ProcessLookupError:  # it may not have come to have a group of its own yet
            self.process.kill()
        self.process.join()

    @property
    def status(self) -> int | None:
        """Exit status, minus the signal that ended it."""
        return self.process.exitcode

    def __str__(self) -> str:
        return f"{' '.join(self.words)}: {self.status} {self.out.read_text()} {self.err.read_text()}"


def start(words: tuple[str, ...], out: Path) -> Command:
    """Start a command; what it prints goes into files beside each other."""
    context = multiprocessing.get_context("forkserver")
    context.set_forkserver_preload(["tests.cli.warmed", "pytest"])
    err = out.with_suffix(".err")
    process = context.Process(target=_run, args=(words, out, err))
    process.start()
    return Command(words, process, out, err)


def _run(words: tuple[str, ...], out: Path, err: Path) -> None:
    os.setsid()
    for path, number in ((out, 1), (err, 2)):
        os.dup2(os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC), number)
    # The streams of the server may hold other descriptors.
    sys.stdout, sys.stderr = os.fdopen(1, "w", closefd=False), os.fdopen(2, "w", closefd=False)
    os.environ["PYTHONPATH"] = str(ROOT)
    os.chdir(out.parent)
    sys.argv = ["evenfield", *words]
    try:
        run()
    except SystemExit as ended:
        # The end of a child of `multiprocessing` waits for processes that are not its own.
        for stream in (sys.stdout, sys.stderr):
            stream.flush()
        os._exit(int(ended.code or 0))
