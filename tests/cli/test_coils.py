"""`windctl coils` on a small book of demo coils."""

from __future__ import annotations

import json
import sqlite3
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from tests.book.samples import packed, started, wind, wound
from windctl.book.export import restored
from windctl.book.open import open_book
from windctl.cli.main import run


@pytest.fixture
def book(tmp_path: Path) -> Path:
    """A closed coil of two turns, then an open one."""
    path = tmp_path / "shop.book"
    with open_book(path) as opened:
        wind(opened, 1, turns=2)
        with opened.begin_coil("b1", 2026, started(2, wall_time="2026-05-05T08:30:00+02:00")) as writer:
            writer.commit(packed(wound(writer.started, 1)))
    return path


Printed = pytest.CaptureFixture[str]


def asked(capsys: Printed, *arguments: str) -> Any:
    """The JSON that a call answers with."""
    assert run([*arguments, "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["format"] == 1
    return answer


def test_list_names_the_coils_the_last_one_first(book: Path, capsys: Printed) -> None:
    coils = asked(capsys, "coils", "list", "--book", str(book))["coils"]
    assert [coil["coil"] for coil in coils] == ["b1-2026-0002", "b1-2026-0001"]
    assert [coil["outcome"] for coil in coils] == ["open", "finished"]
    assert set(coils[1]) >= {
        "coil", "id", "recipe", "started", "outcome", "turns", "dcr_20c_ohm", "verdict"
    }  # fmt: skip
    assert coils[1]["dcr_20c_ohm"] == 25.512345678901234
    assert coils[0]["dcr_20c_ohm"] is None


def test_list_for_people_is_a_table(book: Path, capsys: Printed) -> None:
    assert run(["coils", "list", "--book", str(book)]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].split()[:3] == ["coil", "recipe", "started"]
    assert "25.51 ± 0.31 ohm" in lines[2]
    assert len({line.find("demo bridge") for line in lines[1:]}) == 1


def test_list_can_be_narrowed(book: Path, capsys: Printed) -> None:
    common = ("coils", "list", "--book", str(book))
    assert len(asked(capsys, *common, "--outcome", "finished")["coils"]) == 1
    assert len(asked(capsys, *common, "--limit", "1")["coils"]) == 1
    assert len(asked(capsys, *common, "--batch", "demo lot")["coils"]) == 2
    assert asked(capsys, *common, "--batch", "another")["coils"] == []


def test_show_has_events_and_curve(book: Path, capsys: Printed) -> None:
    coil = asked(capsys, "coils", "show", "1", "--book", str(book))
    assert coil["coil"] == "b1-2026-0001"
    assert coil["events"][0]["kind"] == "coil_started"
    assert coil["events"][-1]["kind"] == "coil_finished"
    assert coil["curve"]


def test_show_for_people_tells_rare_facts_and_counts_the_others(book: Path, capsys: Printed) -> None:
    assert run(["coils", "show", "b1-2026-0001", "--book", str(book)]) == 0
    shown = capsys.readouterr().out
    assert "finished: the target is reached" in shown
    assert "Note by Demo Winder: splice-free" in shown
    assert "20 board reports and 4 readings besides" in shown
    assert "count" not in shown  # turns, not the board's own figures


def test_verify_is_content_with_an_untouched_book(book: Path, capsys: Printed) -> None:
    assert asked(capsys, "coils", "verify", "--book", str(book)) == {"format": 1, "checked": 2, "broken": []}
    assert asked(capsys, "coils", "verify", "1", "--book", str(book))["checked"] == 1


def test_verify_finds_what_was_changed_and_ends_with_its_own_code(book: Path, capsys: Printed) -> None:
    with sqlite3.connect(book) as connection:
        connection.execute("UPDATE coils SET dcr_20c_ohm = 25.0 WHERE number = 'b1-2026-0001'")
    connection.close()
    assert run(["coils", "verify", "--book", str(book), "--json"]) == 7
    answer = json.loads(capsys.readouterr().out)
    assert {one["coil"] for one in answer["broken"]} == {"b1-2026-0001"}
    assert run(["coils", "verify", "--book", str(book)]) == 7
    assert capsys.readouterr().out.startswith("2 checked, 1 broken\n")


def test_an_export_stands_by_itself(book: Path, capsys: Printed) -> None:
    whole = restored(asked(capsys, "coils", "export", "1", "--book", str(book)))
    assert whole.head.number == "b1-2026-0001"


def test_reading_never_makes_a_book(tmp_path: Path, capsys: Printed) -> None:
    missing = tmp_path / "none.book"
    assert run(["coils", "list", "--book", str(missing)]) == 1
    assert not missing.exists()
    assert asked(capsys, "coils", "list") == {"format": 1, "coils": []}
    assert asked(capsys, "coils", "verify") == {"format": 1, "checked": 0, "broken": []}
    assert run(["coils", "verify", "b1-2026-0001"]) == 1


def test_the_variable_names_the_book_and_the_option_beats_it(
    book: Path, tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("WINDCTL_BOOK", str(book))
    assert len(asked(capsys, "coils", "list")["coils"]) == 2
    assert run(["coils", "list", "--book", str(tmp_path / "none.book")]) == 1


def test_an_unknown_coil_is_told_with_the_way_to_find_one(book: Path, capsys: Printed) -> None:
    assert run(["coils", "show", "b1-2026-0099", "--book", str(book)]) == 1
    assert "windctl coils list" in capsys.readouterr().err


def test_list_takes_a_query_in_one_argument_or_several(book: Path, capsys: Printed) -> None:
    common = ("coils", "list", "--book", str(book))
    for query in (["demo", "outcome:open"], ["demo outcome:open"], ["not", "outcome:finished"]):
        assert [coil["coil"] for coil in asked(capsys, *common, *query)["coils"]] == ["b1-2026-0002"]
    assert asked(capsys, *common, "spool:s*") == {"format": 1, "coils": []}
    for sort in (["--sort", "-turns"], ["sort:-turns"], ["--sort=outcome"]):
        coils = asked(capsys, *common, *sort)["coils"]
        assert [coil["coil"] for coil in coils] == ["b1-2026-0001", "b1-2026-0002"]


def test_a_query_that_is_not_understood_is_shown_with_the_place(book: Path, capsys: Printed) -> None:
    assert run(["coils", "list", "--book", str(book), "demo", "verdict:good"]) == 2
    said = capsys.readouterr().err.splitlines()
    assert said[0].startswith("the query, at character 14: verdict is never 'good': it is within, outside or")
    assert said[1:] == ["  demo verdict:good", "               ^"]
    assert run(["coils", "list", "--book", str(book), "--sort", "weight"]) == 2
    assert "sort wants one of started, coil" in capsys.readouterr().err


def test_a_book_of_an_older_version_is_taken_forward_when_it_is_read(tmp_path: Path, capsys: Printed) -> None:
    old = Path(__file__).parents[1] / "book" / "book_of_schema_2.sql"
    path = tmp_path / "shop.book"
    with closing(sqlite3.connect(path)) as connection:
        connection.executescript(old.read_text(encoding="utf-8"))
    coils = asked(capsys, "coils", "list", "--book", str(path), "spool:s1")["coils"]
    assert [coil["coil"] for coil in coils] == ["b1-2026-0001"]
    assert sorted(file.name for file in tmp_path.iterdir()) == [
        "shop.book",
        "shop.book.before-3",
        "shop.book.before-4",
    ]


def test_coils_go_from_book_to_book_in_a_file(book: Path, tmp_path: Path, capsys: Printed) -> None:
    file, other, again = tmp_path / "coils.jsonl", tmp_path / "other.book", tmp_path / "again.jsonl"
    said = asked(capsys, "coils", "export", "--to", str(file), "--book", str(book))
    assert (said["coils"], said["left_out"]) == (["b1-2026-0001"], ["b1-2026-0002"])
    assert said["bytes"] == file.stat().st_size
    said = asked(capsys, "coils", "import", str(file), "--book", str(other))
    assert said["coils"] == [{"coil": "b1-2026-0001", "recorded": "b1-2026-0001", "how": "new"}]
    assert asked(capsys, "coils", "verify", "--book", str(other))["checked"] == 1
    assert run(["coils", "export", "--to", str(again), "--book", str(other)]) == 0
    assert again.read_bytes() == file.read_bytes()
    assert run(["coils", "export", "--to", str(again), "--book", str(other)]) == 2
    assert "write over it with --replace" in capsys.readouterr().err
    assert run(["coils", "export", "--query", "outcome:open", "--to", str(again), "--replace",
                "--book", str(other)]) == 0  # fmt: skip
    assert capsys.readouterr().out.startswith("no coil in ")
    assert run(["coils", "import", str(file), "--book", str(other), "--teach"]) == 0
    assert capsys.readouterr().out == "1 coil here already; it teaches from now on\n"
    assert run(["coils", "export", "--book", str(book)]) == 2
    assert "name one coil, or with --to the file" in capsys.readouterr().err


def test_an_import_says_what_was_refused(book: Path, tmp_path: Path, capsys: Printed) -> None:
    file, other = tmp_path / "coils.jsonl", tmp_path / "other.book"
    with open_book(book) as opened:
        wind(opened, 5, turns=1)
    with open_book(other) as opened:
        wind(opened, 1, turns=1)
    assert run(["coils", "export", "--to", str(file), "--book", str(book)]) == 0
    capsys.readouterr()
    assert run(["coils", "import", str(file), "--book", str(other)]) == 1
    said = capsys.readouterr().out
    assert "1 coil imported" in said
    assert "refused: coil b1-2026-0001: the book has another record under the same id" in said
    lines = file.read_bytes().splitlines(keepends=True)
    file.write_bytes(lines[0] + lines[1].replace(b'"turns":', b'"Turns":') + lines[2])
    assert run(["coils", "import", str(file), "--by", "Demo Winder",
                "--book", str(tmp_path / "third.book")]) == 7  # fmt: skip
    said = capsys.readouterr().out
    assert "1 coil imported" in said
    assert "refused: this export is not whole" in said
    assert run(["coils", "show", "b1-2026-0003", "--book", str(tmp_path / "third.book")]) == 0
    assert "by Demo Winder; teaches nothing" in capsys.readouterr().out


def test_verify_takes_digests_from_elsewhere(book: Path, tmp_path: Path, capsys: Printed) -> None:
    digest = asked(capsys, "coils", "show", "1", "--book", str(book))["record_digest"]
    ident = asked(capsys, "coils", "show", "1", "--book", str(book))["id"]
    common = ("coils", "verify", "--book", str(book))
    for way in (["1", "--digest", digest], ["--digest", digest[:12].upper()]):
        assert asked(capsys, *common, *way) == {"format": 1, "checked": 1, "broken": []}
    page = tmp_path / "report.html"
    page.write_text(f'<meta name="windctl-record" content="b1-2026-0001 {ident} {digest}">', encoding="utf-8")
    assert asked(capsys, *common, str(page), "2")["checked"] == 2
    other = "0" * 63 + "1"
    page.write_text(f'<meta name="windctl-record" content="b1-2026-0001 {ident} {other}">', encoding="utf-8")
    for way in ([str(page)], ["1", "--digest", other]):
        assert run([*common, *way, "--json"]) == 7
        (broken,) = json.loads(capsys.readouterr().out)["broken"]
        assert (broken["coil"], type(broken["event_seq"])) == ("b1-2026-0001", int)
        assert "its end was cut off or exchanged" in broken["what"]
    assert run([*common, "--digest", other]) == 7
    assert run([*common, str(page), "--digest", digest]) == 2
    assert run([*common, "1", "2", "--digest", digest]) == 2
    assert run([*common, "1", "--digest", "12"]) == 2


def test_verify_takes_a_file_of_coils_that_are_not_here(book: Path, tmp_path: Path, capsys: Printed) -> None:
    file, other = tmp_path / "coils.jsonl", tmp_path / "other.book"
    assert run(["coils", "export", "--to", str(file), "--book", str(book)]) == 0
    open_book(other).close()
    capsys.readouterr()
    assert run(["coils", "verify", str(file), "--book", str(other)]) == 0
    assert capsys.readouterr() == ("1 checked, 0 broken\n",
                                   "coils.jsonl, b1-2026-0001: whole, and not in this book\n")  # fmt: skip
    assert run(["coils", "verify", str(file), "--book", str(book)]) == 0


def test_a_book_is_backed_up_and_restored(book: Path, tmp_path: Path, capsys: Printed) -> None:
    kept, new = tmp_path / "kept.book", tmp_path / "new.book"
    assert asked(capsys, "coils", "backup", str(kept), "--book", str(book))["checked"] == 2
    assert run(["coils", "backup", str(kept), "--book", str(book)]) == 1
    assert "say --replace" in capsys.readouterr().err
    assert run(["coils", "restore", str(kept), "--book", str(new)]) == 0
    assert capsys.readouterr().out == f"2 coils in {new}, all verified\n"
    assert run(["coils", "restore", str(kept), "--book", str(new), "--replace"]) == 0
    assert f"the book before it is kept as {new}.before-restore" in capsys.readouterr().out
    assert asked(capsys, "coils", "verify", "--book", str(new))["checked"] == 2
