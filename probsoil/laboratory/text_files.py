"""Lines of a text file, one at a time, whatever of the two usual encodings it is in.

A line that is not UTF-8 is taken as Windows-1252, which every byte but five fits; a file with lines of both
is reported, because one of its makers read the other's letters wrongly.
"""

import csv
import re
from collections.abc import Iterator
from pathlib import Path

from probsoil.errors import Fault
from probsoil.laboratory.collection import Collection

LONGEST_LINE = 1_000_000  # bytes; no sheet has one, and a file without line ends must not fill the memory
_BOMS = (b"\xff\xfe", b"\xfe\xff")
_DELIMITERS = ",;\t"
_COMMA, _POINT = (re.compile(rf"[+-]?\d*{sign}\d+(?:[eE][+-]?\d+)?") for sign in (",", r"\."))


def lines_of(collection: Collection, path: Path, file: str) -> Iterator[tuple[int, str]]:
    """Give the lines of a file, without their ends.

    Parameters
    ----------
    collection : Collection
        Where mistakes go.
    path : Path
        The file.
    file : str
        As the user named it.

    Yields
    ------
    row : int, [-]
        Counted from 1.
    line : str
        Its text.
    """
    in_utf8 = in_windows = 0  # first row of each
    try:
        with path.open("rb") as stream:
            for row, raw in enumerate(iter(lambda: stream.readline(LONGEST_LINE), b""), 1):
                reason = _no_text(raw, row)
                if reason is not None:
                    collection.unreadable(file, f"row {row}: {reason[0]}", reason[1])
                    return
                if not raw.isascii():
                    text, is_utf8 = _decoded(raw)
                    in_utf8 = in_utf8 or (row if is_utf8 and text[:1] != "\ufeff" else 0)
                    in_windows = in_windows or (0 if is_utf8 else row)
                else:
                    text = raw.decode("ascii")
                yield row, text.removeprefix("\ufeff").rstrip("\r\n")
    except FileNotFoundError:
        collection.unreadable(file, "there is no such file")
    except OSError as error:
        collection.unreadable(file, f"the file cannot be read ({error.strerror or error})")
    _report_encoding(collection, file, in_utf8, in_windows)


def csv_rows(collection: Collection, path: Path, file: str) -> Iterator[tuple[int, list[str]]]:
    """Give the rows of a CSV file; commas, semicolons or tabs part its cells.

    Parameters
    ----------
    collection : Collection
        Where mistakes go.
    path : Path
        The file.
    file : str
        As the user named it.

    Yields
    ------
    row : int, [-]
        Line on which the row begins, counted from 1.
    cells : list of str
        Trimmed.
    """
    lines = lines_of(collection, path, file)
    head: list[str] = []
    for _, line in lines:
        head.append(line)
        if line.strip() and not _is_comment(line):
            break
    else:
        return
    delimiter = _delimiter(head[-1])
    begins = len(head)
    reader = csv.reader(_and_then(head[-1], lines), delimiter=delimiter, skipinitialspace=True, strict=True)
    offset = len(head) - 1
    while True:
        begins = offset + reader.line_num + 1
        try:
            cells = next(reader, None)
        except csv.Error as error:
            collection.fault(
                Fault(
                    file=file,
                    line=begins,
                    message=f"the row cannot be parted into cells ({error}); what follows was not looked at",
                    allowed="cells parted by commas, semicolons or tabs; text that has such a sign in quotes",
                    hint="is a quote left open?",
                )
            )
            return
        if cells is None:
            return
        yield begins, [cell.strip() for cell in cells]


def has_decimal_commas(path: Path) -> bool:
    """Return whether the numbers of a CSV file have decimal commas, as where semicolons part its cells.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    commas : bool
        True where semicolons part the cells, some number has a comma, and none has a point.
    """
    ignored = Collection()  # what is wrong with the file is told when it is read
    lines = (line for _, line in lines_of(ignored, path, "") if line.strip() and not _is_comment(line))
    if _delimiter(next(lines, "")) != ";":
        return False
    commas = False
    for line in lines:
        cells = [cell.strip(' "') for cell in line.split(";")]
        if any(_POINT.fullmatch(cell) for cell in cells):
            return False
        commas = commas or any(_COMMA.fullmatch(cell) for cell in cells)
    return commas


def _is_comment(line: str) -> bool:
    return line.lstrip(' "').startswith("#")


def _delimiter(headings: str) -> str:
    return max(_DELIMITERS, key=headings.count)


def _and_then(first: str, lines: Iterator[tuple[int, str]]) -> Iterator[str]:
    yield first + "\n"
    for _, line in lines:
        yield line + "\n"


def _no_text(raw: bytes, row: int) -> tuple[str, str] | None:
    if row == 1 and raw[:2] in _BOMS:
        return "the file is in UTF-16", "save it as CSV in UTF-8"
    if b"\0" in raw:
        return "this is a binary file, not text", "give a CSV, Excel or AGS file"
    if len(raw) >= LONGEST_LINE:
        return f"the line is longer than {LONGEST_LINE:,d} bytes", "is it a text file with line ends?"
    return None


def _decoded(raw: bytes) -> tuple[str, bool]:
    try:
        return raw.decode("utf-8"), True
    except UnicodeDecodeError:
        return raw.decode("cp1252", errors="replace"), False


def _report_encoding(collection: Collection, file: str, in_utf8: int, in_windows: int) -> None:
    if in_utf8 and in_windows:
        collection.fault(
            Fault(
                file=file,
                line=in_windows,
                message=f"the encodings are mixed: this row is in Windows-1252, row {in_utf8} in UTF-8",
                allowed="one encoding throughout, UTF-8 or Windows-1252",
                hint="open the file, mend its letters, and save it as UTF-8",
            )
        )
    elif in_windows:
        collection.remark(f"{file}, row {in_windows}: not in UTF-8; read as Windows-1252")
