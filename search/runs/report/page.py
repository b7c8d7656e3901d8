"""sweep.html: one page that needs nothing else, on paper as on a screen."""

from __future__ import annotations

import json
from base64 import b64encode
from collections.abc import Sequence
from functools import cache
from hashlib import sha256
from pathlib import Path

from search.foundation.pages import template
from search.runs.report.content import content, summary
from search.runs.sweep_records import RowResult

HERE = Path(__file__).parent
SCRIPTS = ("elements.js", "figures.js", "table.js", "charts.js", "plan.js", "sweep.js")
"""In the order in which they run, as one script."""


def sweep_html(name: str, columns: Sequence[str], rows: Sequence[RowResult], open_: bool = False) -> str:
    """Draw the page.

    Every word from a file enters as escaped text or as data, never as markup; the page's policy lets nothing
    run but its own script, and nothing be fetched.

    Parameters
    ----------
    name : of the sweep
    columns : what varies
    rows : the rows
    open_ : the sweep has not ended
    """
    script = _script()
    return template(HERE / "sweep.html.j2").render(
        name=name,
        summary=summary(rows),
        is_open=open_,
        data=_as_data(content(name, columns, rows)),
        style=(HERE / "sweep.css").read_text(encoding="utf-8"),
        script=script,
        digest=b64encode(sha256(script.encode()).digest()).decode(),
    )


def _as_data(document: object) -> str:
    """JSON that ends no script element, whatever names it holds."""
    text = json.dumps(document, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    return text.replace("&", "\\u0026").replace("<", "\\u003c").replace(">", "\\u003e")


@cache
def _script() -> str:
    parts = [(HERE / name).read_text(encoding="utf-8") for name in SCRIPTS]
    return '"use strict";\n{\n' + "\n".join(parts) + "}\n"
