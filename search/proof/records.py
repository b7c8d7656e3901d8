"""What a proof says: findings, one sentence each, and the verdict over all of them."""

from __future__ import annotations

from dataclasses import dataclass


class Refuted(Exception):
    """A claim of the file does not hold; the message is the sentence that the reader is told."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One claim of the file, whether it holds, and what was found."""

    what: str
    ok: bool
    detail: str
    on_trust: bool = False
    """Whether it was taken on the word of the file, since proving it again takes long."""

    def __str__(self) -> str:
        return f"{self.what}: {self.detail}"


@dataclass(frozen=True, slots=True)
class Verdict:
    """All findings about one plan file, in the order in which they were made."""

    findings: tuple[Finding, ...]

    @property
    def holds(self) -> bool:
        """Whether every claim of the file was proved."""
        return all(finding.ok for finding in self.findings)

    @property
    def refuted(self) -> tuple[Finding, ...]:
        """The claims that do not hold."""
        return tuple(finding for finding in self.findings if not finding.ok)

    @property
    def on_trust(self) -> bool:
        """Whether something was not proved again but taken on the word of the file."""
        return any(finding.on_trust for finding in self.findings)

    def document(self) -> dict[str, object]:
        """The verdict as plain JSON data."""
        return {
            "holds": self.holds,
            "findings": [
                {"what": finding.what, "ok": finding.ok, "detail": finding.detail}
                | ({"on_trust": True} if finding.on_trust else {})
                for finding in self.findings
            ],
        }
