"""Hold our reader of AGS4 files against the standard's own library, cell by cell.

    python .ci/ags_compare.py DUMP

`DUMP` is what `ags_library.py` wrote. Exit code 1 where a cell, a unit, a type or a line differs, or where
the library's checker finds a mistake in the demo file.
"""

import json
import sys
from pathlib import Path

from probsoil.laboratory.ags import AgsReader
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.text_files import lines_of

Groups = dict[str, dict[str, list[str]]]  # group: heading: unit, type, cells; and "line_number"
OWN_COLUMNS = ("HEADING", "line_number")  # of the library, beside the headings of the file


def our_groups(path: str) -> Groups:
    """Return what our reader sees, in the form of the dump."""
    collection = Collection()
    groups: Groups = {}
    for row in AgsReader(collection, path).rows(lines_of(collection, Path(path), path)):
        group = groups.setdefault(
            row.group.name,
            {
                heading: [unit, kind]
                for heading, unit, kind in zip(
                    row.group.headings, row.group.units, row.group.types, strict=True
                )
            }
            | {"line_number": []},
        )
        for heading, cell in row.cells.items():
            group[heading].append(cell)
        group["line_number"].append(str(row.line))
    assert not collection.faults, "\n".join(str(fault) for fault in collection.faults)
    return groups


def their_groups(columns: Groups) -> Groups:
    """Return the dump without what the library adds, lines of data only."""
    return {
        name: {heading: cells for heading, cells in group.items() if heading not in OWN_COLUMNS}
        | {"line_number": [str(line) for line in group["line_number"][2:]]}
        for name, group in columns.items()
    }


def differences(ours: Groups, theirs: Groups) -> list[str]:
    """Return every column that differs, in words."""
    found = [f"group {name} is read by one of the two only" for name in sorted(ours.keys() ^ theirs.keys())]
    for name in sorted(ours.keys() & theirs.keys()):
        for heading in sorted(ours[name].keys() | theirs[name].keys()):
            one, other = ours[name].get(heading), theirs[name].get(heading)
            if one != other:
                found.append(f"{name}, {heading}: ours {one}, theirs {other}")
    return found


def main(dump: str) -> int:
    """Compare every file of a dump and return the exit code."""
    said = json.loads(Path(dump).read_text(encoding="utf-8"))
    found = []
    for path, read in said["files"].items():
        ours = our_groups(path)
        found += [f"{path}: {one}" for one in differences(ours, their_groups(read["columns"]))]
        cells = sum(len(column) for group in ours.values() for column in group.values())
        sys.stdout.write(f"{path}: {len(ours)} groups, {cells:,d} cells compared\n")
    found += [f"the library's checker: {rule}: {told}" for rule, told in said["checker"].items()]
    sys.stdout.write("\n".join(found) + "\n" if found else "no difference, and no error by the checker\n")
    return 1 if found else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
