"""What to say about a text that is not TOML, in bench language and with a line."""

import re
import tomllib
from typing import Any

from digestplan.plan.wording import plain
from digestplan.problems import Problem

_MOST_PARTS = 5  # parts of a dotted name; plans need three
_MOST_OF = {",": 50_000, "[": 10_000}  # a TOML reader is slow with more, and no plan has them
_WHERE = re.compile(r" \(at (?:line (\d+), column \d+|end of document)\)\Z")
_KEY = r"""(?:[\w-]+|"[^"\n]*"|'[^'\n]*')"""
_PARTS = re.compile(
    rf"""\#[^\n]*|\"{{3}}(?:\\.|[^\\])*?\"{{3}}|'{{3}}.*?'{{3}}
    |(?P<long>{_KEY}(?:[ \t]*\.[ \t]*{_KEY}){{{_MOST_PARTS},}})
    |"(?:\\.|[^"\\\n])*"|'[^'\n]*'|[\w-]+""",
    re.VERBOSE | re.DOTALL,
)

# Beginning of the TOML reader's message, and what it means at the bench.
_PHRASES = (
    ("Expected newline", "something after the value does not belong there"),
    ("Invalid value", "no value can be read here"),
    ("Expected '=' after", "a name must be followed by = and its value"),
    ("Cannot overwrite", "this name is written twice, or both as a value and as a table"),
    ("Cannot declare", "this table is written twice, or both as a value and as a table"),
    ("Cannot mutate", "this table is closed and cannot be added to"),
    ("Illegal character '\\n'", "the quotation marks are not closed on this line"),
    ("Illegal character", "there is a control character here"),
    ("Found invalid character", "there is a control character here"),
    ("Unescaped '\\'", "a backslash between quotation marks must be written twice"),
    ("Invalid initial character", "a name is wanted here, of letters, digits, _ and -"),
    ("Invalid statement", 'neither name = "value" nor [table] can be read here'),
    ("Expected ']'", "the square bracket of a table's name is not closed"),
    ("Unclosed", "a bracket is not closed"),
    ("Invalid date", "there is no such date or time"),
)

# What stands on the line, and what may be wrong with it.
_HINTS = (
    (
        re.compile(r"[=\[,{]\s*[+-]?\d+,\d+"),
        (
            "a decimal comma is ambiguous: write 0.5 with a point, and a value with its unit in"
            ' quotation marks, such as "0.5 mL"'
        ),
    ),
    (
        re.compile(r"=\s*\d{4}-\d\d-\d\d[Tt ]\d\d:\d\d\s*(#|\Z|[+Zz-])"),
        "write the seconds as well, such as 2026-03-12T17:30:00",
    ),
    (
        re.compile(
            r"=\s*[+-]?[\d.]+(e[+-]?\d+)?\s*[^\W\d_]|=\s*[+-]?[\d.]+\s*[%°±]", re.IGNORECASE
        ),
        'put a value with a unit in quotation marks, such as "3 mL"',
    ),
    (re.compile(r"[“”„‘’«»]"), 'use straight quotation marks: " at both ends'),
    (re.compile(r"=\s*(True|False|yes|no)\b", re.IGNORECASE), "write true or false"),
    (re.compile(r"=\s*[^\W\d_]"), "put text in quotation marks"),
    (re.compile(r"=\s*(#|\Z)"), "a value is missing after the ="),
    (re.compile(r"^\s*[\w.-]+\s*:"), "write = between a name and its value, not a colon"),
)


def loaded(text: str) -> dict[str, Any] | Problem:
    """Return the tables of a TOML text, or what is wrong with it."""
    if any(text.count(mark) > most for mark, most in _MOST_OF.items()):
        return Problem("", "there are more commas or brackets than any plan needs")
    for match in _PARTS.finditer(text):
        if match.group("long"):
            line = text.count("\n", 0, match.start()) + 1
            return Problem("", "a name here has more parts than any plan needs", line=line)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        return _described(str(error), text)
    except RecursionError:
        return Problem("", "brackets are nested far deeper than any plan needs")
    except ValueError:  # a whole number of thousands of digits
        return Problem("", "a number has far more digits than any plan needs")


def _described(message: str, text: str) -> Problem:
    found = _WHERE.search(message)
    written = text.split("\n")
    line = int(found[1]) if found and found[1] else len(text.rstrip().split("\n"))
    reason = plain(_WHERE.sub("", message), 120)
    if found and not found[1]:
        reason = "the file ends before a bracket or quotation mark is closed"
    else:
        reason = next((said for start, said in _PHRASES if message.startswith(start)), reason)
    hint = next((say for seen, say in _HINTS if seen.search(written[line - 1].rstrip())), None)
    return Problem("", f"{reason}; {hint}" if hint else reason, line=line)
