"""Random valid TOML documents that are hard to keep one's place in."""

from __future__ import annotations

import tomllib

from hypothesis import strategies as st

_BARE = st.sampled_from(["a", "b", "c", "lay", "1", "-", "_x"])
_KEY_PART = st.one_of(
    _BARE,
    st.sampled_from(['"a"', "'b'", '"c d"', '"a.b"', "'#'", '"é"', '"\\u00e9\\n"', '"]"', "'=\"'", '""']),
)
_DOT = st.sampled_from([".", " . ", ". ", "\t."])
_GAP = st.sampled_from(["", " ", "  ", "\t"])
_BREAK = st.sampled_from(["", " ", "\n", "\n\t", ' # ], } " é\n', "\n# '''\n\n  "])

_SCALARS = st.one_of(
    st.integers(-(10**6), 10**6).map(str),
    st.floats(allow_nan=False, allow_infinity=False, width=32).map(repr),
    st.sampled_from(["true", "+inf", "0x1F", "1_000"]),
    st.sampled_from(["1979-05-27 07:32:00", "1979-05-27T07:32:00.5+02:00", "1979-05-27", "07:32:00"]),
    st.sampled_from(
        [
            '"plain"',
            '"quote \\" hash # bracket ] é"',
            "'back\\slash \" # }'",
            '""',
            "''",
        ]
    ),
    st.sampled_from(
        [
            '"""one line"""',
            '"""\nfirst # no comment\n  key = "value"\n[not.a.table]\n"""',
            '"""two quotes "" and one \\""" inside"""',
            '"""ends with two quotes"""""',
            '"""backslash \\\n   goes on"""',
            "'''\nraw \\ \" ''\n[x]\n'''",
            "'''ends with one quote''''",
            '""""""',
        ]
    ),
)


@st.composite
def _keys(draw: st.DrawFn) -> str:
    parts = draw(st.lists(_KEY_PART, min_size=1, max_size=3))
    text = parts[0]
    for part in parts[1:]:
        text += draw(_DOT) + part
    return text


def _arrays(values: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    @st.composite
    def array(draw: st.DrawFn) -> str:
        items = draw(st.lists(values, max_size=3))
        text = "[" + draw(_BREAK)
        for i, item in enumerate(items):
            text += item + draw(_BREAK)
            if i + 1 < len(items) or draw(st.booleans()):
                text += "," + draw(_BREAK)
        return text + "]"

    return array()


def _inline_tables(values: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    @st.composite
    def table(draw: st.DrawFn) -> str:
        pairs = draw(st.lists(st.tuples(_keys(), _GAP, values), max_size=3))
        return "{" + draw(_GAP) + ", ".join(f"{key}{gap}={gap}{value}" for key, gap, value in pairs) + "}"

    return table()


_VALUES = st.recursive(_SCALARS, lambda inner: _arrays(inner) | _inline_tables(inner), max_leaves=6)


_KIND = st.sampled_from(["pair", "pair", "pair", "table", "array", "blank"])


@st.composite
def _lines(draw: st.DrawFn) -> str:
    gap = draw(_GAP)
    kind = draw(_KIND)
    if kind == "blank":
        return gap
    key = draw(_keys())
    if kind in ("table", "array"):
        key = draw(st.sampled_from([key, "p", "p.q", "p . q", '"p".r']))  # headers that build on each other
    if kind == "table":
        return f"{gap}[{gap}{key}{gap}]"
    if kind == "array":
        return f"{gap}[[{gap}{key}{gap}]]"
    return f"{gap}{key}{gap}={draw(_GAP)}{draw(_VALUES)}"


_STATEMENTS = st.lists(_lines(), max_size=10)
_COMMENT = st.sampled_from(["", "", " # é [x] = \"'"])
_END = st.sampled_from(["\n", "\r\n"])


@st.composite
def documents(draw: st.DrawFn) -> str:
    """Statements one by one; those that the standard parser refuses after the ones before are left out."""
    end = draw(_END)
    text = ""
    for statement in draw(_STATEMENTS):
        comment = draw(_COMMENT)
        longer = text + statement + comment + "\n"
        try:
            tomllib.loads(longer)
        except tomllib.TOMLDecodeError:
            continue
        text = longer
    return text.replace("\n", end)
