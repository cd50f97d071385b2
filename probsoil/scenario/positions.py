"""Where every key and value of a TOML text stands.

The scanner walks text that `tomllib` has accepted already, so it need not look for
mistakes; it only has to agree with `tomllib` on what is a key and what is a value.
"""

import tomllib
from dataclasses import dataclass

from probsoil.scenario.slips import Path

_BLANK = " \t"
_WHITE = " \t\n"


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Character ranges of one key and its value.

    Attributes
    ----------
    key, value : tuple of int, [-]
        Start and end, counted in characters from 0, the end left out. For a table opened by a header
        or by a dotted key both are the header or the key, for a list item both are the item.
    """

    key: tuple[int, int]
    value: tuple[int, int]


def places(text: str) -> dict[Path, Place]:
    """Return where every key and list item of a TOML text stands.

    Parameters
    ----------
    text : str
        Text that `tomllib` accepts, with line ends normalised.

    Returns
    -------
    places : dict of path to Place
        Paths as in the parsed data, list positions from 0.
    """
    return _Scanner(text).scan()


class _Scanner:
    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.found: dict[Path, Place] = {}
        self.list_lengths: dict[Path, int] = {}
        self.table: Path = ()

    def scan(self) -> dict[Path, Place]:
        while self._skip_to_statement():
            if self.text[self.at] == "[":
                self._header()
            else:
                self._pair(self.table)
        return self.found

    # Blanks and comments.

    def _skip(self, characters: str) -> None:
        while self.at < len(self.text) and self.text[self.at] in characters:
            self.at += 1

    def _skip_to_statement(self) -> bool:
        while True:
            self._skip(_WHITE)
            if self.at >= len(self.text):
                return False
            if self.text[self.at] != "#":
                return True
            self._skip_comment()

    def _skip_comment(self) -> None:
        end = self.text.find("\n", self.at)
        self.at = len(self.text) if end < 0 else end

    # Statements.

    def _header(self) -> None:
        start = self.at
        is_list = self.text.startswith("[[", start)
        self.at += 2 if is_list else 1
        keys = [key for key, _ in self._dotted_key()]
        self.at += 2 if is_list else 1
        place = Place(key=(start, self.at), value=(start, self.at))
        path: Path = ()
        for key in keys[:-1]:
            path = self._within((*path, key), place)
        path = (*path, keys[-1])
        if is_list:
            self.found.setdefault(path, place)
            self.list_lengths[path] = self.list_lengths.get(path, 0) + 1
            path = (*path, self.list_lengths[path] - 1)
            self.found[path] = place
        else:
            self.found[path] = place
        self.table = path

    def _within(self, path: Path, place: Place) -> Path:
        """Step into a table named on the way; of a list, into its latest item."""
        self.found.setdefault(path, place)
        return (*path, self.list_lengths[path] - 1) if path in self.list_lengths else path

    def _pair(self, table: Path) -> None:
        keys = self._dotted_key()
        self.at += 1  # the equals sign
        self._skip(_BLANK)
        path = (*table, *(key for key, _ in keys))
        start = self.at
        self._value(path)
        whole = (keys[0][1][0], keys[-1][1][1])
        for depth in range(len(table) + 1, len(path)):
            self.found.setdefault(path[:depth], Place(key=whole, value=whole))
        self.found[path] = Place(key=whole, value=(start, self.at))

    def _dotted_key(self) -> list[tuple[str, tuple[int, int]]]:
        keys = []
        while True:
            self._skip(_BLANK)
            start = self.at
            keys.append((self._simple_key(), (start, self.at)))
            self._skip(_BLANK)
            if self.text[self.at] != ".":
                return keys
            self.at += 1

    def _simple_key(self) -> str:
        start = self.at
        if self.text[start] in "\"'":
            self._string()
            return str(tomllib.loads(f"k = {self.text[start : self.at]}")["k"])
        while self.text[self.at].isalnum() or self.text[self.at] in "-_":
            self.at += 1
        return self.text[start : self.at]

    # Values.

    def _value(self, path: Path) -> None:
        first = self.text[self.at]
        if first in "\"'":
            self._string()
        elif first == "[":
            self._array(path)
        elif first == "{":
            self._inline_table(path)
        else:
            self._scalar()

    def _string(self) -> None:
        quote = self.text[self.at]
        fence = quote * 3 if self.text.startswith(quote * 3, self.at) else quote
        self.at += len(fence)
        while not self.text.startswith(fence, self.at):
            self.at += 2 if quote == '"' and self.text[self.at] == "\\" else 1
        self.at += len(fence)
        # Up to two quotes may stand before a closing fence of three.
        extra = 0
        while len(fence) == 3 and extra < 2 and self.text.startswith(quote, self.at):
            self.at += 1
            extra += 1

    def _array(self, path: Path) -> None:
        self.at += 1
        position = 0
        while self._skip_to_statement() and self.text[self.at] != "]":
            if self.text[self.at] == ",":
                self.at += 1
                continue
            start = self.at
            self._value((*path, position))
            self.found[(*path, position)] = Place(key=(start, self.at), value=(start, self.at))
            position += 1
        self.at += 1

    def _inline_table(self, path: Path) -> None:
        self.at += 1
        while self._skip_to_statement() and self.text[self.at] != "}":
            if self.text[self.at] == ",":
                self.at += 1
                continue
            self._pair(path)
        self.at += 1

    def _scalar(self) -> None:
        start = self.at
        while self.at < len(self.text) and self.text[self.at] not in ",]}#\n":
            self.at += 1
        self.at = start + len(self.text[start : self.at].rstrip())
