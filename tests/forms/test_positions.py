"""Positions of keys and values, held to two other parsers: tree-sitter's TOML grammar, which keeps positions,
and the standard library's, which knows what the document means."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping
from typing import Any

import pytest
import tree_sitter
import tree_sitter_toml
from hypothesis import given, settings

from tests.forms.toml_documents import documents
from windctl.forms.faults import KeyPath
from windctl.forms.positions import Spot, find_positions

_PARSER = tree_sitter.Parser(tree_sitter.Language(tree_sitter_toml.language()))
_KEYS = ("bare_key", "quoted_key")
_PUNCTUATION = ("=", ",", "[", "]", "{", "}", "comment", *_KEYS, "dotted_key")


class Oracle:
    """What tree-sitter sees: the text of every key part and every value, by where it begins."""

    def __init__(self, text: str) -> None:
        self._lines = text.encode().split(b"\n")
        self.keys: dict[Spot, str] = {}
        self.values: dict[Spot, str] = {}
        root = _PARSER.parse(text.encode()).root_node
        self.accepts = not root.has_error
        self._walk(root)

    def _walk(self, node: tree_sitter.Node) -> None:
        for child in node.children:
            if child.type in _KEYS:
                self.keys[self._spot(child)] = _text(child)
            elif node.type in ("pair", "array") and child.type not in _PUNCTUATION:
                self.values[self._spot(child)] = _text(child)
            self._walk(child)

    def _spot(self, node: tree_sitter.Node) -> Spot:
        row, column = node.start_point
        return Spot(row + 1, len(self._lines[row][:column].decode()) + 1)


def _text(node: tree_sitter.Node) -> str:
    assert node.text is not None
    return node.text.decode()


def _paths(data: Any, base: KeyPath = ()) -> Iterator[tuple[KeyPath, Any]]:
    entries = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for key, value in entries:
        yield (*base, key), value
        yield from _paths(value, (*base, key))


def _meaning_of_key(text: str) -> str:
    return next(iter(tomllib.loads(f"{text} = 0")))


def agrees_with_other_parsers(text: str) -> None:
    """Every key path is there, named and valued where tree-sitter finds that name and that value."""
    data = tomllib.loads(text)
    oracle = Oracle(text)
    places = find_positions(text)
    expected = dict(_paths(data))
    assert set(places) == set(expected)
    assert oracle.accepts
    for path, meaning in expected.items():
        place = places[path]
        if isinstance(path[-1], str):
            assert _meaning_of_key(oracle.keys[place.key]) == path[-1]
        if place.value in oracle.values:
            assert tomllib.loads(f"value = {oracle.values[place.value]}")["value"] == meaning
        else:  # a table made by a header or a dotted key has no value of its own in the text
            assert place.value == place.key
            assert isinstance(meaning, dict | list)
            assert place.key in oracle.keys


@settings(max_examples=200)
@given(documents())
def test_every_path_of_a_document_is_where_the_other_parsers_find_it(text: str) -> None:
    agrees_with_other_parsers(text)


def test_the_oracle_sees_values_of_both_kinds() -> None:
    oracle = Oracle('"é" = {x = [1, "ü"]} # c\n[a.b]\n')
    assert oracle.accepts
    assert oracle.values[Spot(1, 16)] == '"ü"'
    assert oracle.keys[Spot(2, 4)] == "b"


@pytest.mark.parametrize(
    ("text", "path", "key", "value"),
    [
        ("pitch_mm = 0.02\n", ("pitch_mm",), (1, 1), (1, 12)),
        ("[lay]\n  pitch_mm=0.02", ("lay", "pitch_mm"), (2, 3), (2, 12)),
        ("\n[ lay ]\n", ("lay",), (2, 3), (2, 3)),
        ("lay.pitch = 1", ("lay",), (1, 1), (1, 1)),
        ("lay.pitch = 1", ("lay", "pitch"), (1, 5), (1, 13)),
        ("a = {b = {c = 1}}", ("a", "b", "c"), (1, 11), (1, 15)),
        ("a = [\n 1,\n 2]", ("a", 1), (3, 2), (3, 2)),
        ("[[p]]\nx = 1\n[[p]]\nx = 2", ("p", 1, "x"), (4, 1), (4, 5)),
        ("[[p]]\n[p.q]\nx = 1\n[[p]]\n[p.q]\nx = 2", ("p", 1, "q", "x"), (6, 1), (6, 5)),
        ('s = """\n[x]\ny = 1\n"""\nz = 3', ("z",), (5, 1), (5, 5)),
        ('"a b"."c" = 1', ("a b", "c"), (1, 7), (1, 13)),
        ("a = 1\r\nb = 2\r\n", ("b",), (2, 1), (2, 5)),
        ('x = {"é" = "ü", y = 3}', ("x", "y"), (1, 17), (1, 21)),
    ],
)
def test_places(text: str, path: KeyPath, key: tuple[int, int], value: tuple[int, int]) -> None:
    tomllib.loads(text)
    place = find_positions(text)[path]
    assert (place.key, place.value) == (Spot(*key), Spot(*value))


def test_a_table_stands_at_its_own_header_wherever_that_is() -> None:
    places: Mapping[KeyPath, Any] = find_positions("[a.b]\nx = 1\n\n[a]\ny = 2\n")
    assert places[("a",)].key == Spot(4, 2)
    assert places[("a", "b")].key == Spot(1, 4)
