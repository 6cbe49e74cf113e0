"""The text of our ES modules taken apart: code without its comments, and its literals.

Idea: one pass over the text that knows strings, templates, regular expressions and comments, which
is all that is needed to ask which words stand in a module and how long its functions are. Left out:
the grammar of the language.
"""

import re
from dataclasses import dataclass

_PIECE = re.compile(
    r"""
    (?P<comment> //[^\n]* | /\*.*?\*/ )
  | (?P<string> "(?:[^"\\\n]|\\.)*" | '(?:[^'\\\n]|\\.)*' )
  | (?P<template> `(?:[^`\\]|\\.)*` )
  | (?P<pattern> (?<=[(,=:\[!&|?{};\n]) [ ]*
      /(?![/*]) (?: [^/\\\n\[] | \\. | \[(?:[^\]\\\n]|\\.)*\] )+ /[a-z]* )
    """,
    re.VERBOSE | re.DOTALL,
)
_FUNCTION = re.compile(
    r"(?:function\s*(?P<plain>\w+)\s*\([^)]*\)|(?:const|let)\s+(?P<arrow>\w+)\s*=\s*(?:async\s*)?"
    r"(?:\([^)]*\)|\w+)\s*=>|^ {2}(?P<method>\w+)\([^)]*\))\s*\{",
    re.MULTILINE,
)


@dataclass(frozen=True, slots=True)
class Taken:
    """A module taken apart: its code with every comment and literal blanked, and the literals."""

    code: str
    literals: list[tuple[int, str]]


def taken_apart(text: str) -> Taken:
    """Return code and literals; each literal with the number of its line.

    Examples
    --------
    >>> taken_apart('say("a b"); // and "c d"').literals
    [(1, 'a b')]
    >>> taken_apart('say(`at ${place}`) + text.split(/"x y"/)').literals
    [(1, 'at ${place}')]
    """
    literals: list[tuple[int, str]] = []

    def blank(found: re.Match[str]) -> str:
        piece = found.group()
        if found.lastgroup in {"string", "template"}:
            literals.append((text.count("\n", 0, found.start()) + 1, piece[1:-1]))
            return piece[0] + re.sub(r"[^\n]", " ", piece[1:-1]) + piece[-1]
        return re.sub(r"[^\n]", " ", piece)

    return Taken(_PIECE.sub(blank, text), literals)


def functions(code: str) -> dict[str, int]:
    """Return how many lines each named function of blanked code has.

    Examples
    --------
    >>> functions("const f = (a) => {\\n  g();\\n};\\nfunction g() { return { a: 1 }; }")
    {'f': 3, 'g': 1}
    """
    found = {}
    for start in _FUNCTION.finditer(code):
        name = next(part for part in start.groups() if part)
        if name in {"if", "for", "while", "switch", "catch"}:
            continue
        end = _end(code, start.end())
        found[name] = code.count("\n", start.start(), end) + 1
    return found


def _end(code: str, begin: int) -> int:
    depth = 1
    for at in range(begin, len(code)):
        depth += {"{": 1, "}": -1}.get(code[at], 0)
        if depth == 0:
            return at
    return len(code)
