"""A real dask scheduler with its workers, as processes on this machine."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

START_SECONDS = 60.0


class Cluster:
    """The processes of a scheduler and its workers.

    Parameters
    ----------
    folder : for their files
    """

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.address = ""
        self.processes: list[subprocess.Popen[bytes]] = []

    def start(self, workers: int) -> None:
        """Start a scheduler on a free port and wait for its address."""
        file = self.folder / "scheduler.json"
        here = ("--host", "127.0.0.1", "--no-dashboard", "--dashboard-address", "127.0.0.1:0")
        self.run("scheduler", "--port", "0", "--scheduler-file", str(file), *here)
        started = time.monotonic()
        while not (file.exists() and file.read_text().strip()):
            assert time.monotonic() - started < START_SECONDS
            time.sleep(0.1)
        self.address = json.loads(file.read_text())["address"]
        for _ in range(workers):
            self.run("worker", self.address, "--nthreads", "1", *here)

    @property
    def scheduler(self) -> subprocess.Popen[bytes]:
        """The process of the scheduler."""
        return self.processes[0]

    def run(self, *words: str) -> None:
        root = str(Path(__file__).parents[2])
        self.processes.append(
            subprocess.Popen(
                [sys.executable, "-m", "dask", *words],
                cwd=self.folder,
                env=os.environ | {"PYTHONPATH": root},
                stdout=subprocess.DEVNULL,
                stderr=subprocess.DEVNULL,
            )
        )

    def stop(self) -> None:
        """End every process."""
        for process in reversed(self.processes):
            process.terminate()
        for process in self.processes:
            try:
                process.wait(10)
            except subprocess.TimeoutExpired:
                process.kill()
                process.wait()


@contextmanager
def cluster(folder: Path, workers: int = 2) -> Iterator[Cluster]:
    """A scheduler with workers of one thread each."""
    folder.mkdir(parents=True, exist_ok=True)
    made = Cluster(folder)
    try:
        made.start(workers)
        yield made
    finally:
        made.stop()
