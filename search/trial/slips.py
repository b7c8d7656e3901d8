"""The usual slips in a single value, each recognised by name: what was probably meant."""

from __future__ import annotations

import re

from search.trial.nodes import Node, Scalar, Sequence

TRUTH = {"yes": "true", "y": "true", "on": "true", "1": "true", "no": "false", "n": "false", "off": "false"}
TRUTH |= {"0": "false", "true": "true", "false": "false"}
NUMBER = r"[+-]?[0-9]+(?:\.[0-9]+)?"
QUOTED = "the number without its quotes"


def number_slip(node: Node) -> str:
    """What to write in the place of something that was meant as a number; empty where nobody can tell."""
    if not isinstance(node, Scalar):
        return ""
    text = node.text.strip()
    if node.quoted and re.fullmatch(NUMBER, text):
        return f"{QUOTED}: {text}"
    if re.fullmatch(r"[+-]?[0-9]+,[0-9]+", text):
        return f"a decimal point: {text.replace(',', '.')}"
    if re.fullmatch(r"[+-]?0+[0-9]+(?:\.[0-9]*)?", text):
        return f"the number without noughts before it: {text.lstrip('+-0') or '0'}"
    if re.fullmatch(r"[0-9]{2,4}-[0-9]{1,2}-[0-9]{1,2}|[0-9]{1,2}\.[0-9]{1,2}\.[0-9]{2,4}", text):
        return "a number: this is a date"
    if re.fullmatch(r"[0-9]{1,3}(?::[0-9]{1,2}){1,2}", text):
        return "a number: this is a time, or a ratio that is written p/q where one may stand"
    if text.endswith("%"):
        return f"the number alone: {text[:-1].strip().replace(',', '.')}"
    if re.fullmatch(r"[0-9]{1,3}(?:[ _'’\u00a0\u202f][0-9]{3})+", text):
        return f"the digits together: {re.sub('[^0-9]', '', text)}"
    if range_ := re.fullmatch(r"([0-9]+)\s*(?:-|–|\.\.|to)\s*([0-9]+)", text):
        return f"[{range_[1]}, {range_[2]}], where a range may stand; else one number"
    if united := re.fullmatch(rf"({NUMBER})\s*[^\W\d_]\S*(?:\s.*)?", text):
        return f"the number alone, without a unit: {united[1]}"
    if "\u2212" in text:
        return "the minus sign of the keyboard: -"
    return ""


def truth_slip(node: Node) -> str:
    """true or false in the place of another word for it."""
    meant = TRUTH.get(node.text.strip().casefold(), "") if isinstance(node, Scalar) else ""
    return f"{meant}, without quotes" if meant else ""


def list_slip(node: Node) -> str:
    """Names without the brackets of a list."""
    if isinstance(node, Scalar) and not node.nothing:
        return f"brackets round it: [{node.text.strip()[:60]}]"
    return ""


def pairs_slip(node: Node) -> str:
    """A list in the place of names with values."""
    if isinstance(node, Sequence) and node.items:
        return "`name: value` without dashes and without brackets"
    return ""
