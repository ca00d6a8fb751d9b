"""What is wrong with a file that is no TOML, in the words of one who writes such files by hand."""

from __future__ import annotations

import re

LONGEST_LINE = 60
_KEY = r"\s*([A-Za-z0-9_.-]+)\s*="
_DECIMAL_COMMA = re.compile(_KEY + r"\s*([+-]?\d+),(\d+)\s*(?:#.*)?$")
_UNIT = re.compile(_KEY + r"\s*([+-]?\d+(?:\.\d+)?)\s*[A-Za-z%/²°]+\s*(?:#.*)?$")
_CURLY = "\u201c\u201d\u201e\u2018\u2019"


def toml_words(message: str, text: str) -> tuple[str, str]:
    """What is wrong and what to write instead, from what the parser says and the line it means."""
    place = re.search(r"line (\d+), column \d+", message)
    lines = text.splitlines()
    number = int(place[1]) if place else len(lines)
    line = lines[number - 1].strip() if 0 < number <= len(lines) else ""
    reason = re.sub(r"\s*\(at [^)]*\)", "", message)
    key = re.match(_KEY, line)
    where, shown = f"is no TOML in line {number}", _excerpt(line)
    if comma := _DECIMAL_COMMA.match(line):
        return f"{where}: a decimal comma in {shown}", f"a decimal point: {comma[1]} = {comma[2]}.{comma[3]}"
    if unit := _UNIT.match(line):
        return f"{where}: a unit behind the number in {shown}", f"the number alone: {unit[1]} = {unit[2]}"
    if reason.startswith("Cannot overwrite") and key:
        return (
            f"{where}: the key {key[1]} stands twice in its table: {shown}",
            "each key once, with the value that holds",
        )
    if line.startswith("[") and re.match(r"Cannot (declare|overwrite|mutate)", reason):
        name = line.strip("[] ").split("]")[0]
        instead = f"one [{name}] with all its keys; of what a robot has several ([[panel]], [[rail]], [[load]]) each"
        return f"{where}: the table {name} stands twice: {shown}", f"{instead} with double brackets"
    if any(quote in line for quote in _CURLY):
        return f"{where}: curly quotes in {shown}", 'straight quotes around text, e.g. name = "Row scout"'
    usual = 'key = value, with text in quotes, numbers bare and lists in brackets, e.g. name = "Row scout"'
    return f"{where} ({reason[:1].lower()}{reason[1:]}): {shown}", usual


def _excerpt(line: str) -> str:
    """The line as it stands in the file, not too long, without signs that move the cursor."""
    plain = "".join(sign if sign.isprintable() else "?" for sign in line)
    return plain if len(plain) <= LONGEST_LINE else plain[: LONGEST_LINE - 3] + "..."
