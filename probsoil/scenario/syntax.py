"""Mistakes of TOML itself, told in plain words."""

import re
from collections.abc import Sequence

from probsoil.errors import Fault
from probsoil.scenario.structure import LISTS

_PLACE = re.compile(r"\s*\(at (?:line (\d+), column (\d+)|end of document)\)\s*$")
_HEADER = re.compile(r"^[ \t]*\[{1,2}[ \t]*\"?([A-Za-z0-9_-]+)\"?[ \t]*\]{1,2}")
_ONE_LINE = "a table in braces must stand on one line; longer ones go under a header of their own"
# Beginnings of the parser's messages, with what they mean to someone who does not know TOML.
_MEANINGS: tuple[tuple[str, str, str | None], ...] = (
    ("Cannot overwrite a value", "this key or table is given twice", "keep one of the two"),
    (
        "Cannot declare",
        "this table is given twice",
        "keep one header; a list of tables has [[double]] brackets",
    ),
    ("Duplicate inline table key", "this key is given twice in one table", "keep one of the two"),
    ("Cannot redefine", "this key or table is given twice", "keep one of the two"),
    ("Cannot mutate", "this adds to a table that is closed already", "write all of its keys in one place"),
    ("Unclosed inline table", "the table in braces is not closed", _ONE_LINE),
    ("Unclosed array", "the list is not closed", "close it with ]"),
    ("Unterminated string", "the text in quotes is not closed", "close it with the same quote"),
    ('Expected "', "the text in quotes is not closed", "close it with the same quote"),
    (
        "Illegal character '\\n'",
        "the text in quotes is not closed on its line",
        "close it with the same quote",
    ),
    ("Expected '='", "a key must be followed by = and a value", None),
    (
        "Invalid initial character for a key part",
        "a key is expected here",
        "a key of letters, digits, - and _",
    ),
    ("Invalid statement", "this is neither key = value nor a [header]", None),
    ("Invalid value", "a value is expected here", "a number, true or false, or text in quotes"),
    ("Expected newline", "something stands after the value", "one key = value to a line"),
    ("Expected ']", "the header is not closed", "[table] or [[item of a list]]"),
    (
        "Unescaped '\\'",
        "a backslash in text must be doubled",
        'put the text in single quotes, or write "\\\\"',
    ),
)


def syntax_fault(message: str, text: str, file: str) -> Fault:
    r"""Return the fault behind a message of the TOML parser.

    Parameters
    ----------
    message : str
        As the parser gave it.
    text : str
        Text of the file, line ends being ``\n``.
    file : str
        File as the user named it.

    Returns
    -------
    fault : Fault
        With line and column where the parser gave them.
    """
    match = _PLACE.search(message)
    lines = text.split("\n")
    if match is not None and match[1]:
        line, column = int(match[1]), int(match[2])
    else:
        line, column = len(lines), len(lines[-1]) + 1
    plain = _PLACE.sub("", message)
    single = _single_bracket(lines, line, plain)
    if single is not None:
        return _bracket_fault(*single, lines, file)
    excerpt = lines[line - 1] if 0 < line <= len(lines) else None
    said, hint = next(
        ((said, hint) for start, said, hint in _MEANINGS if plain.startswith(start)), (plain, None)
    )
    return Fault(
        file=file,
        line=line,
        column=column,
        message=f"not valid TOML: {said}",
        allowed="what follows can be checked only once this is mended",
        hint=_special_hint(excerpt, plain) or hint,
        excerpt=excerpt,
        span=(column, 1),
    )


def _single_bracket(lines: Sequence[str], line: int, plain: str) -> tuple[int, str] | None:
    """Return line and name of a header in single brackets that ought to have double ones."""
    header = _HEADER.match(lines[line - 1]) if 0 < line <= len(lines) else None
    if header is None or not plain.startswith(("Cannot overwrite", "Cannot declare")):
        return None
    name = header[1]
    if name not in LISTS and f"{name}s" not in LISTS:
        return None
    alone = re.compile(rf'^[ \t]*\[[ \t]*"?{re.escape(name)}"?[ \t]*\](?!\])')
    found = next((number for number, text in enumerate(lines, start=1) if alone.match(text)), None)
    return None if found is None else (found, name)


def _bracket_fault(line: int, name: str, lines: Sequence[str], file: str) -> Fault:
    excerpt = lines[line - 1]
    column = excerpt.index("[") + 1
    right = name if name in LISTS else f"{name}s"
    return Fault(
        file=file,
        line=line,
        column=column,
        message=f"not valid TOML: [{name}] opens one table, and there are more of them in this file",
        allowed="what follows can be checked only once this is mended",
        hint=f"double brackets for each: [[{right}]]",
        excerpt=excerpt,
        span=(column, excerpt.index("]") + 2 - column),
    )


def _special_hint(excerpt: str | None, plain: str) -> str | None:
    if excerpt is None or plain.startswith(("Cannot", "Duplicate")):
        return None
    if excerpt.count("{") > excerpt.count("}"):
        return _ONE_LINE
    if re.search(r"=\s*[+-]?\d+,\d", excerpt):
        return "use a decimal point, not a comma"
    if re.search(r"=\s*[+-]?[\d.]+(?:[eE][+-]?\d+)?\s*[A-Za-z%]", excerpt):
        return 'a number with a unit goes in quotes, such as "6 weeks"'
    return None
