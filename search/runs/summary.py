"""The short lines of the store: what the other tables say of each result, in one row.

They repeat what stands elsewhere and are written anew in the same transaction that changes it, so that a
hundred thousand results are listed and searched without a look at their plans and certificates.
"""

from __future__ import annotations

import sqlite3

from search.runs.plan import PROVEN_PERCENT, Standing
from search.trial.records import AimKind

ALIKE = ", ".join(f"'{kind}'" for kind in AimKind if kind.treats_pairs_alike)
COUNTS = f"(key.aim = '{AimKind.EVEN_MEETINGS}')"
GAP = (
    f"max(0.0, 100 * CASE WHEN {COUNTS} THEN plan.score / bound.value - 1"
    " ELSE 1 - plan.score / bound.value END)"
)
KNOWN = f"(plan.score > 0 AND bound.value > 0 AND (NOT {COUNTS} OR plan.objective IS NOT NULL))"
"""A disconnected plan has meetings to count too, but no variance."""
BALANCED = f"(plan.balanced AND key.aim IN ({ALIKE}) AND (NOT {COUNTS} OR plan.score <= bound.value))"

COLUMNS = "digest, aim, name, folded, t, b, n, score, bound, gap, standing, mark, made, runs"
ROWS = f"""
INSERT INTO result ({COLUMNS})
SELECT key.digest, key.aim, name, folded(name), t, b, n, plan.score, bound.value,
  CASE WHEN NOT {KNOWN} THEN NULL WHEN {BALANCED} THEN 0.0 ELSE {GAP} END,
  CASE WHEN {KNOWN} IS NOT TRUE THEN '{Standing.FEASIBLE}' WHEN {BALANCED} THEN '{Standing.BALANCED}'
    WHEN {GAP} <= {PROVEN_PERCENT} THEN '{Standing.PROVEN_OPTIMAL}' ELSE '{Standing.BOUNDED}' END,
  coalesce(plan.mark, ''), coalesce(plan.made, bound.made, last_seen),
  (SELECT count(*) FROM run WHERE run.digest = key.digest AND run.aim = key.aim)
FROM %s AS key JOIN problem USING (digest)
  LEFT JOIN plan USING (digest, aim) LEFT JOIN bound USING (digest, aim)
"""
EVERY = (
    "(SELECT digest, aim FROM plan UNION SELECT digest, aim FROM bound UNION SELECT digest, aim FROM run"
    " UNION SELECT digest, aim FROM issued)"
)


def folded(name: object) -> str:
    """A name as it is searched for: in small letters."""
    return str(name).casefold()


def prepare(connection: sqlite3.Connection) -> None:
    """Teach a connection what the rows need."""
    connection.create_function("folded", 1, folded, deterministic=True)


def write(connection: sqlite3.Connection, digest: str, aim: str) -> None:
    """Write the line of one result anew."""
    connection.execute("DELETE FROM result WHERE digest = ? AND aim = ?", (digest, aim))
    one = (
        "(SELECT DISTINCT digest, aim FROM (SELECT digest, aim FROM plan WHERE digest = ?1 AND aim = ?2"
        " UNION ALL SELECT digest, aim FROM bound WHERE digest = ?1 AND aim = ?2"
        " UNION ALL SELECT digest, aim FROM run WHERE digest = ?1 AND aim = ?2"
        " UNION ALL SELECT digest, aim FROM issued WHERE digest = ?1 AND aim = ?2))"
    )
    connection.execute(ROWS % one, (digest, aim))


def write_all(connection: sqlite3.Connection) -> None:
    """Write the lines of all results anew."""
    connection.execute("DELETE FROM result")
    connection.execute(ROWS % EVERY)
