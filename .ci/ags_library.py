"""Dump what the AGS4 standard's own library reads from files, and what its checker says of the first.

Runs in an environment of its own, because that library asks for old versions of others:
    python .ci/ags_library.py DUMP FILE [FILE...]
"""

import json
import sys
from pathlib import Path

from python_ags4 import AGS4

NOTES = ("Summary of data", "Metadata")  # parts of the checker's answer that name no error


def dump(path: str) -> dict[str, dict[str, object]]:
    """Return headings and columns of every group; a column begins with its unit and its type."""
    tables, headings, *_ = AGS4.AGS4_to_dict(path, get_line_numbers=True)
    return {"columns": tables, "headings": headings}


if __name__ == "__main__":
    target, *files = sys.argv[1:]
    said = {rule: found for rule, found in AGS4.check_file(files[0]).items() if rule not in NOTES}
    answer = {"files": {path: dump(path) for path in files}, "checker": said}
    Path(target).write_text(json.dumps(answer, default=str), encoding="utf-8")
