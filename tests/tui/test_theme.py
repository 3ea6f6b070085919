"""Colours that carry: every role in both themes, and contrast by the published formula."""

from __future__ import annotations

import re
from itertools import pairwise
from pathlib import Path

import pytest
from textual.color import Color
from textual.theme import Theme

from windctl.tui import looks
from windctl.tui.keymap import _KEYS, checked
from windctl.tui.theme import DARK, LIGHT, colour_of

TUI = Path(looks.__file__).parent


def luminance(colour: str) -> float:
    """Relative luminance, W3C, Web Content Accessibility Guidelines 2.1."""
    parts = [part / 255 for part in Color.parse(colour).rgb]
    red, green, blue = (c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    """The same source: (lighter + 0.05) / (darker + 0.05)."""
    darker, lighter = sorted((luminance(one), luminance(other)))
    return (lighter + 0.05) / (darker + 0.05)


def test_the_formula_gives_the_published_extremes() -> None:
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.01)  # known as just short of 4.5


@pytest.mark.parametrize("theme", [DARK, LIGHT], ids=lambda theme: theme.name)
def test_text_is_readable(theme: Theme) -> None:
    ground = theme.background or ""
    for role in ("good", "bad", "unsure", "label", "digits", "guide", "past", "target"):
        assert contrast(theme.variables[f"wc-{role}"], ground) >= 4.5, role
    assert contrast(theme.foreground or "", ground) >= 7
    roles = {look.role for look in looks.LOOKS.values()} | {"ended"}
    for role in roles:
        assert contrast(theme.variables[f"wc-{role}"], theme.variables["wc-on-band"]) >= 4.5, role


@pytest.mark.parametrize("theme", [DARK, LIGHT], ids=lambda theme: theme.name)
def test_wire_grows_lighter_with_every_turn_so_that_grey_tells_it_too(theme: Theme) -> None:
    shades = [luminance(colour_of(step / 20, theme.variables) or "") for step in range(21)]
    assert all(after > before for before, after in pairwise(shades))
    assert shades[-1] / shades[0] > 8


def test_every_role_that_is_drawn_has_a_colour_in_both_themes() -> None:
    source = "".join(path.read_text() for path in TUI.rglob("*.py") if path.parent.name == "pictures")
    roles = "flange|core|ghost|guide|past|fan|target|finish|axis|label|over|digits"
    used = set(re.findall(rf'"({roles})"', source))
    assert len(used) >= 10
    for theme in (DARK, LIGHT):
        assert {role for role in used if f"wc-{role}" not in theme.variables} == set()
    assert set(DARK.variables) == set(LIGHT.variables)


def test_nothing_is_on_chords_that_multiplexers_keep() -> None:
    for name, (keys, _, _) in _KEYS.items():
        for key in keys.split(","):
            assert key not in {"ctrl+s", "ctrl+q", "ctrl+j", "ctrl+b", "ctrl+a"}, name
            assert not key.startswith("ctrl+") or key == "ctrl+c", name


def test_a_key_that_is_no_key_is_told() -> None:
    good, wrong = checked({"wind.go": "j", "wind.fly": "k", "quit": 7})
    assert good == {"wind.go": "j"}
    assert "wind.fly" in wrong[0]
    assert "quit" in wrong[1]


def test_markup_is_off_wherever_text_is_shown() -> None:
    """A plain Static, OptionList or notification would read [brackets] as instructions."""
    shows = re.compile(r"\b(?:Static|OptionList|RichLog|notify)\((?:[^()]|\([^()]*\))*\)")
    calls = [(path.name, call) for path in TUI.rglob("*.py") for call in shows.findall(path.read_text())]
    assert len(calls) > 20
    assert [call for call in calls if "markup=False" not in call[1]] == []
