"""The scanner of positions agrees with the TOML parser on documents of every shape."""

import tomllib
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.scenario.positions import places

BARE = st.text(alphabet="abcXYZ019-_", min_size=1, max_size=4)
TEXT = st.text(alphabet=st.characters(exclude_categories=("Cs",), exclude_characters="\r"), max_size=8)
BLANK = st.sampled_from(["", " ", "\t", "  "])
GAP = st.sampled_from(["", " ", "\n", " # remark, with ] } , \" = '\n", "\n\n\t"])


def basic(text: str) -> str:
    out = "".join(
        f"\\U{ord(c):08x}" if c in '"\\' or (ord(c) < 32 and c != "\t") or ord(c) == 127 else c for c in text
    )
    return f'"{out}"'


def literal(text: str) -> str:
    if any(c == "'" or (ord(c) < 32 and c != "\t") or ord(c) == 127 for c in text):
        return basic(text)
    return f"'{text}'"


def multi_line(text: str, quote: str, extra: int) -> str:
    safe = "".join(c for c in text if c not in "\"'\\" and (ord(c) >= 32 or c in "\t\n") and ord(c) != 127)
    return quote * 3 + "\n" + safe + quote * extra + quote * 3


KEY = st.one_of(BARE, TEXT.map(basic), TEXT.map(literal))
SCALAR = st.one_of(
    st.integers(-(10**6), 10**6).map(str),
    st.sampled_from(
        ["0xFF", "0o17", "0b101", "1_000", "+7", "inf", "-nan", "6.5e-3", "1e9", "true", "false"]
    ),
    st.sampled_from(["1979-05-27T07:32:00Z", "1979-05-27 07:32:00", "1979-05-27", "07:32:00.5"]),
    TEXT.map(basic),
    TEXT.map(literal),
    st.builds(multi_line, TEXT, st.sampled_from(["'", '"']), st.integers(0, 2)),
)


@st.composite
def array(draw: st.DrawFn, values: st.SearchStrategy[str]) -> str:
    items = draw(st.lists(values, max_size=3))
    body = "".join(draw(GAP) + item + draw(GAP) + "," for item in items)
    if body and draw(st.booleans()):
        body = body[:-1]
    return f"[{body}{draw(GAP)}]"


@st.composite
def inline_table(draw: st.DrawFn, values: st.SearchStrategy[str]) -> str:
    keys = draw(st.lists(BARE, max_size=3, unique=True))
    pairs = [draw(BLANK) + key + draw(BLANK) + "=" + draw(BLANK) + draw(values) + draw(BLANK) for key in keys]
    return "{" + ",".join(pairs) + "}"


VALUE = st.recursive(SCALAR, lambda inner: st.one_of(array(inner), inline_table(inner)), max_leaves=6)


@st.composite
def pair(draw: st.DrawFn) -> str:
    keys = draw(st.lists(KEY, min_size=1, max_size=3))
    dotted = (draw(BLANK) + "." + draw(BLANK)).join(keys)
    remark = draw(st.sampled_from(["", " # [not] a = table"]))
    return draw(BLANK) + dotted + draw(BLANK) + "=" + draw(BLANK) + draw(VALUE) + remark


@st.composite
def header(draw: st.DrawFn) -> str:
    name = (draw(BLANK) + ".").join(draw(st.lists(KEY, min_size=1, max_size=3)))
    return f"[[{name}]]" if draw(st.booleans()) else f"[{draw(BLANK)}{name}{draw(BLANK)}]"


@st.composite
def document(draw: st.DrawFn) -> str:
    """Lines that are kept only if the parser still accepts the whole."""
    text = ""
    for line in draw(st.lists(st.one_of(pair(), pair(), header()), max_size=10)):
        longer = text + line + draw(st.sampled_from(["\n", "\n\n", "\n# remark\n"]))
        try:
            tomllib.loads(longer)
        except tomllib.TOMLDecodeError:
            continue
        text = longer
    return text if draw(st.booleans()) else text.rstrip("\n")


def paths_of(data: Any, path: tuple[str | int, ...] = ()) -> dict[tuple[str | int, ...], Any]:
    found = {path: data} if path else {}
    if isinstance(data, dict):
        for key, value in data.items():
            found |= paths_of(value, (*path, key))
    elif isinstance(data, list):
        for position, value in enumerate(data):
            found |= paths_of(value, (*path, position))
    return found


def same(one: Any, other: Any) -> bool:
    return repr(one) == repr(other)  # nan is not equal to itself


@settings(max_examples=300, deadline=None)
@given(document())
def test_same_paths_and_every_value_span_parses_to_the_same_value(text):
    data = tomllib.loads(text)
    expected = paths_of(data)
    found = places(text)
    assert set(found) == set(expected)
    for path, place in found.items():
        written = text[slice(*place.value)]
        assert written == written.strip()
        if place.key == place.value and (isinstance(path[-1], str) or written.startswith("[[")):
            assert isinstance(expected[path], dict | list)
            if isinstance(path[-1], str) or isinstance(expected[path], dict):
                continue  # opened by a header or a dotted key, which is no value
        assert same(tomllib.loads(f"x = {written}")["x"], expected[path])


@settings(max_examples=300, deadline=None)
@given(document())
def test_every_key_span_is_the_key(text):
    data = tomllib.loads(text)
    for path, value in paths_of(data).items():
        place = places(text)[path]
        written = text[slice(*place.key)]
        if isinstance(path[-1], str) and not written.startswith("[") and not isinstance(value, dict):
            table: Any = tomllib.loads(f"{written} = 1")
            keys = []
            while isinstance(table, dict):
                ((key, table),) = table.items()
                keys.append(key)
            assert tuple(keys) == path[-len(keys) :]


def test_a_document_with_everything():
    text = (
        'a.b = 1 # x\n"q k" = [1, # one\n  {c = "]"}, [2]]\n[[t]]\nd = 1979-05-27 07:32:00\n'
        "[[t]]\n[t.u]\ns = '''it''s'''\n[[t.v]]\nw = {x = {y = 'z'}}\n"
    )
    found = places(text)
    assert set(found) == set(paths_of(tomllib.loads(text)))
    spans = {path: text[slice(*place.value)] for path, place in found.items()}
    assert spans["q k", 1, "c"] == '"]"'
    assert spans["t", 0, "d"] == "1979-05-27 07:32:00"
    assert spans["t", 1, "u", "s"] == "'''it''s'''"
    assert spans["t", 1, "v", 0, "w", "x", "y"] == "'z'"
