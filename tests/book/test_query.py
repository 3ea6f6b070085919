"""The language in which coils are looked for: what it understands, and how it says what it does not."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.book.query import (
    EVERYTHING,
    FIELDS,
    SORTED_BY,
    Name,
    Order,
    Part,
    Period,
    Query,
    Span,
    Term,
    parse,
    sorted_by,
)
from windctl.errors import QueryError


def one(text: str) -> Term:
    """The only term of a text."""
    (term,) = parse(text).terms
    return term


@pytest.mark.parametrize("text", ["", "   ", "\t\n"])
def test_nothing_asks_for_everything(text: str) -> None:
    assert parse(text) == EVERYTHING


def test_terms_stand_beside_each_other() -> None:
    text = 'recipe:neck verdict:within since:2026-01 spool:s1,s2 turns:7000..8000 not "hand" sort:-ohm,coil'
    assert parse(text) == Query(
        (
            Term("recipe", (Part("neck"),)),
            Term("verdict", (Name(("within",)),)),
            Term("started", (Period("2026-01", None),)),
            Term("spool", (Name(("s1",)), Name(("s2",)))),
            Term("turns", (Span(7000.0, 8000.0, True),)),
            Term("", (Part("hand"),), negated=True),
        ),
        (Order("ohm", True), Order("coil", False)),
    )


@pytest.mark.parametrize(
    ("text", "span"),
    [
        ("7500", Span(7499.5, 7500.5, False)),
        ("7.5k", Span(7450.0, 7550.0, False)),
        ("3.64K", Span(3635.0, 3645.0, False)),
        ("7500.0", Span(7499.95, 7500.05, False)),
        ("7k..8k", Span(7000.0, 8000.0, True)),
        ("7000..", Span(7000.0, None, True)),
        ("..8000.5", Span(None, 8000.5, True)),
        ("8..8", Span(8.0, 8.0, True)),
    ],
)
def test_numbers(text: str, span: Span) -> None:
    wanted = one(f"turns:{text}").wanted[0]
    assert isinstance(wanted, Span)
    assert (wanted.low, wanted.high) == pytest.approx((span.low, span.high))
    assert wanted.high_included == span.high_included


@pytest.mark.parametrize(
    ("text", "period"),
    [
        ("started:2026", Period("2026", "2027")),
        ("started:2026-12", Period("2026-12", "2027-01")),
        ("started:2026-01", Period("2026-01", "2026-02")),
        ("started:2028-02-29", Period("2028-02-29", "2028-03-01")),
        ("started:2026-12-31t23:59", Period("2026-12-31T23:59", "2027-01-01T00:00")),
        ("started:2026-01..2026-03", Period("2026-01", "2026-04")),
        ("started:..2026-03-31", Period(None, "2026-04-01")),
        ("since:2026-03", Period("2026-03", None)),
        ("until:2026-03", Period(None, "2026-04")),
    ],
)
def test_times_end_where_the_next_one_begins(text: str, period: Period) -> None:
    assert one(text) == Term("started", (period,))


def test_quotes_take_everything_literally() -> None:
    assert one('"say ""ah"": a, b"') == Term("", (Part('say "ah": a, b'),))
    assert one('batch:"lot 118, second",x*y') == Term("batch", (Name(("lot 118, second",)), Name(("x", "y"))))
    assert one('batch:"x*y"') == Term("batch", (Name(("x*y",)),))
    assert one('spool:""') == Term("spool", (Name(("",)),))
    assert one('"not"') == Term("", (Part("not"),))


def test_choices_are_taken_in_any_writing() -> None:
    for text in ('verdict:"not judged"', "VERDICT:not-judged", "Verdict:Not_Judged"):
        assert one(text) == Term("verdict", (Name(("not judged",)),))


@pytest.mark.parametrize(
    ("text", "at", "says"),
    [
        ("recipe:neck verdikt:within", 12, "did you mean verdict? fields are recipe, coil, batch"),
        ("at 12:30", 3, "there is no field '12': fields are"),
        ("verdict:good", 8, "verdict is never 'good': it is within, outside or \"not judged\""),
        ("outcome:within", 8, "it is open, finished, stopped or tripped"),
        ("recipe:", 7, "recipe: wants a text, without a blank before it"),
        ("recipe: neck", 7, "recipe: wants a text, without a blank before it"),
        ("batch:a,", 8, "batch: wants a name, in which * stands for anything"),
        ("turns:many", 6, "'many' is no number: it wants a number such as 7500 or 3.64k, or a range"),
        ("turns:7,5k..8", 8, "5k is more than 8"),
        ("ohm:..", 4, "or a range such as 7000..8000, 7000.. or ..8000"),
        ("turns:8000..7000", 6, "8000 is more than 7000"),
        ("started:soon", 8, "'soon' is no time: it wants a time such as 2026, 2026-03"),
        ("since:2026-13", 6, "there is no 2026-13: month must be in 1..12"),
        ("until:2026-02-30", 6, "there is no 2026-02-30: day is out of range for month"),
        ("since:0000", 6, "the year 0 is outside 1900 to 9998"),
        ("since:2026-01..2026-03", 6, "is no time"),
        ("started:2026-03..2026-01", 8, "2026-03 comes after 2026-01"),
        ("started:..", 8, "wants a time"),
        ('neck "by hand', 5, "this quote is not closed"),
        ('neck ""', 5, "there is nothing in these quotes to look for"),
        ('ne"ck', 2, "a quote begins within a word"),
        ('batch:"a"b', 9, "a comma or a blank is missing"),
        ("not", 0, "after 'not' a condition is missing"),
        ("not sort:ohm", 0, "not before sort"),
        ("sort:-weight", 6, "cannot sort by 'weight': sort wants one of started, coil"),
        (":neck", 0, "before the colon a field is missing"),
    ],
)
def test_what_is_not_understood_is_told_with_its_place_and_what_is_possible(
    text: str, at: int, says: str
) -> None:
    with pytest.raises(QueryError) as caught:
        parse(text)
    assert caught.value.at == at
    assert says in str(caught.value)
    assert str(caught.value).startswith(f"the query, at character {at + 1}: ")


def test_sorting_by_itself() -> None:
    assert sorted_by("") == ()
    assert sorted_by(" -turns,recipe ") == (Order("turns", True), Order("recipe", False))
    for text, at in (("turns recipe", 6), ("mass", 0), ("turns,", 6), ("-", 1)):
        with pytest.raises(QueryError) as caught:
            sorted_by(text)
        assert caught.value.at == at


@given(st.text(max_size=40))
def test_any_text_is_understood_or_told_where_it_is_not(text: str) -> None:
    try:
        parse(text)
    except QueryError as error:
        assert 0 <= error.at <= len(text)


tokens = st.sampled_from([*(f"{field}:" for field in (*FIELDS, "sort")), "not", " ", '"', ",", "..", "-", "*",
                          "2026-03", "7.5k", "within", *SORTED_BY])  # fmt: skip


@given(st.lists(tokens, max_size=12))
def test_any_row_of_its_own_words_is_understood_or_told_where_it_is_not(parts: list[str]) -> None:
    text = "".join(parts)
    try:
        parse(text)
    except QueryError as error:
        assert 0 <= error.at <= len(text)
