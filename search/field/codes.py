"""Short codes for the cells of the map, since names can be long."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator, Sequence

MOST_LETTERS = 4
MOST_INITIALS = 3


def treatment_codes(names: Sequence[str]) -> tuple[str, ...]:
    """A short code for each name, all different even where case is lost.

    A short name is its own code; otherwise initials and number, else the first letters, else a
    number. A name of digits alone gets a `#`, so that it is not taken for a plot number.
    """
    taken: set[str] = set()
    codes = []
    for number, name in enumerate(names, start=1):
        code = next(code for code in _candidates(name, number) if code.casefold() not in taken)
        taken.add(code.casefold())
        codes.append(code)
    return tuple(codes)


def _candidates(name: str, number: int) -> Iterator[str]:
    """Codes for a name, the best first; the last cannot be another's."""
    words = _plain_words(name)
    letters = "".join(words)
    if letters.isdigit():
        yield f"#{letters[-3:]}"
    elif letters:
        if len(letters) <= (MOST_INITIALS if letters.isalpha() else MOST_LETTERS):
            yield letters
        tail = words[-1][1 - MOST_LETTERS :] if words[-1].isdigit() else ""
        if tail:
            initials = "".join(word[0] for word in words[:-1])
            yield initials[: MOST_LETTERS - len(tail)] + tail
        elif len(words) > 1:
            yield "".join(word[0] for word in words)[:MOST_INITIALS]
        yield letters[:2]
        yield from (letters[0] + other for other in letters[2:])
        yield letters[:3]
        yield from (letters[:2] + other for other in letters[3:])
    yield f"#{number}"
    yield f"#{number}b"  # where the digits of another name have taken the number


def _plain_words(name: str) -> list[str]:
    """Runs of plain capitals and runs of digits: `Élan 12b` gives ELAN, 12, B."""
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().upper()
    words: list[str] = []
    before = ""
    for c in plain:
        sort = "letter" if c.isalpha() else "digit" if c.isdigit() else ""
        if sort and sort == before:
            words[-1] += c
        elif sort:
            words.append(c)
        before = sort
    return words
