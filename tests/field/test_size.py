"""The largest fields: a whole packet within the time and memory of a small machine."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
MADE = """
import resource, sys, time
from pathlib import Path
from search.field.packet import write_packet
from search.trial.reading import trial_from_document
from tests.field.made import document_of

rows = [f"{line},{place},B{(line - 1) // 2 * 25 + (place - 1) // 4:03d}"
        for line in range(1, 51) for place in range(1, 101)]
names = {f"Line {i:04d}": {"amount": {"per_plot": 0.25, "unit": "kg"},
                           **({"caution": "Treated seed"} if i % 50 == 0 else {})} for i in range(1250)}
trial = trial_from_document({
    "trial": "Big field", "treatments": names,
    "ground": {"places": "line,place,block\\n" + "\\n".join(rows), "plot_m": [1.5, 6], "gap_m": [0.3, 1],
               "north_deg": 15, "corner": [52.1, 0.3]},
    "precision": {"cv_percent": 9, "mean": 8.1, "unit": "t/ha"},
})
document = document_of(trial)
begun = time.perf_counter()
write_packet(trial, document, Path(sys.argv[1]))
print(trial.n, time.perf_counter() - begun, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024)
"""


@pytest.mark.slow
def test_five_thousand_plots_fit_into_45_seconds_and_700_mebibytes(tmp_path: Path) -> None:
    """1,250 treatments on 5,000 plots in 625 blocks: paper, labels, workbook, page, tables."""
    done = subprocess.run(
        [sys.executable, "-c", MADE, str(tmp_path)], cwd=ROOT, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    plots, seconds, mebibytes = map(float, done.stdout.split())
    assert plots == 5000
    assert seconds < 45
    assert mebibytes < 700
    assert len(list(tmp_path.iterdir())) == 6
