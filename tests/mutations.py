"""Trial files spoiled at random, in the ways of a tired hand and of a hostile one."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path
from random import Random

ROOT = Path(__file__).parents[1]
SIGNS = [
    "",
    " ",
    "  ",
    "\t",
    "\n",
    ":",
    ": ",
    "- ",
    "[",
    "]",
    "{",
    "}",
    ",",
    "#",
    "&a ",
    "*a",
    "!!int ",
    "|",
    ">",
]
MARKS = ["'", '"', "---\n", "...", "? ", "<<: *a", "%", "@", "`", "[[[[", "]]]]", "{}", "[]", "\\", "../../x"]
HIDDEN = [
    "\u202e",
    "\u0301",
    "\ufeff",
    "\x00",
    "\x07",
    "\x85",
    "\u2028",
    "\U0001f33e",
    "x" * 300,
    "=1+1",
    "<b>",
]
NUMBERS = [
    "0",
    "-1",
    "1e9",
    "999999999999",
    "3.5",
    "8,1",
    "9%",
    "[3, 4]",
    "٣",
    "1/0",
    "1_000",
    "0x10",
    ".inf",
]
WORDS = [
    "~",
    "null",
    "true",
    "no",
    "2027-03-02",
    "12:30",
    "every block",
    "block 1",
    "T01",
    "A",
    "count",
    "plots",
]
KEYS = ["control: true", "replicates", "must_hold", "twice_in_block: true", "meet_at_most: 1", "aim: overall"]
TOKENS = [*SIGNS, *MARKS, *HIDDEN, *NUMBERS, *WORDS, *KEYS]


def drawn_text(rng: Random) -> str:
    """A text to start from: one of the examples, or a file with one mistake."""
    return rng.choice(rng.choice((_texts("configs"), _texts("tests/data"))))


@cache
def _texts(folder: str) -> tuple[str, ...]:
    paths = sorted((ROOT / folder).glob("*.yaml"))
    return tuple(path.read_text(encoding="utf-8") for path in paths if path.stat().st_size < 4000)


def mutated(text: str, rng: Random) -> str:
    """The text after one to five changes."""
    for _ in range(rng.choice((1, 1, 2, 3, 5))):
        text = rng.choice(_WAYS)(text, rng)
    return text


def _token_in(text: str, rng: Random) -> str:
    at = rng.randrange(len(text) + 1)
    return text[:at] + rng.choice(TOKENS) + text[at:]


def _word_changed(text: str, rng: Random) -> str:
    words = list(re.finditer(r"[\w.%-]+", text))
    if not words:
        return text
    word = rng.choice(words)
    other = rng.choice([*TOKENS, rng.choice(words).group()])
    return text[: word.start()] + other + text[word.end() :]


def _cut(text: str, rng: Random) -> str:
    start = rng.randrange(len(text) + 1)
    return text[:start] + text[start + rng.choice((1, 1, 3, 10, 80)) :]


def _line_moved(text: str, rng: Random) -> str:
    lines = text.splitlines(keepends=True) or [""]
    line = lines[rng.randrange(len(lines))]
    if rng.random() < 0.5:
        lines.remove(line)
    lines.insert(rng.randrange(len(lines) + 1), rng.choice(("", "  ", "    ")) + line)
    return "".join(lines)


def _number_changed(text: str, rng: Random) -> str:
    numbers = list(re.finditer(r"\d+", text))
    if not numbers:
        return text
    number = rng.choice(numbers)
    value = rng.choice((0, 1, 2, 3, 5, 7, 12, 20, 47, 1000, 10**6, 10**12))
    return f"{text[: number.start()]}{value}{text[number.end() :]}"


_WAYS = (_token_in, _word_changed, _word_changed, _cut, _line_moved, _number_changed, _number_changed)
