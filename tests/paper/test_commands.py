"""`windctl coils report` and `coils label`: files, answers and refusals."""

from __future__ import annotations

import json
import re
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest

from tests.paper.conftest import BATCH
from tests.paper.reading import page
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]


@pytest.fixture(autouse=True)
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_a_report_is_named_after_its_coil(book_path: Path, here: Path, capsys: Printed) -> None:
    assert run(["coils", "report", "2", "--book", str(book_path)]) == 0
    (file,) = here.iterdir()
    assert capsys.readouterr().out == f"{file.name}\n"
    assert page(file.read_text(encoding="utf-8")).all("h1")[0].text == file.stem


def test_a_report_of_a_batch(book_path: Path, here: Path, capsys: Printed) -> None:
    assert run(["coils", "report", "--batch", BATCH, "--json", "--book", str(book_path)]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["file"] == "batch-lot-1-more.html" and len(answer["coils"]) == 3
    assert page((here / answer["file"]).read_text(encoding="utf-8")).all("h1")[0].text == BATCH


def test_a_page_may_go_to_standard_output(
    book_path: Path, here: Path, capfdbinary: pytest.CaptureFixture[bytes]
) -> None:
    assert run(["coils", "report", "2", "-o", "-", "--book", str(book_path)]) == 0
    assert page(capfdbinary.readouterr().out.decode()).all("h1")
    assert list(here.iterdir()) == []


def test_one_label_as_a_drawing_and_many_on_sheets(book_path: Path, here: Path) -> None:
    common = ["--book", str(book_path)]
    assert run(["coils", "label", "2", "-o", "one.svg", *common]) == 0
    root = ET.parse(here / "one.svg").getroot()
    assert (root.get("width"), root.get("height")) == ("60mm", "30mm")
    assert (
        run(["coils", "label", "1", "3", "--paper", "letter", "--columns", "2", "--start", "3", *common]) == 0
    )
    (sheet,) = here.glob("labels-*.html")
    assert len(page(sheet.read_text(encoding="utf-8")).all("svg")) == 2
    assert run(["coils", "label", "--batch", BATCH, "-o", "all.html", *common]) == 0
    assert len(page((here / "all.html").read_text(encoding="utf-8")).all("svg")) == 3


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["report"], "name one coil, or a batch"),
        (["report", "1", "--batch", "x"], "name one coil, or a batch"),
        (["report", "--batch", "x"], "no coil of batch 'x'"),
        (["label"], "name coils, or a batch"),
        (["label", "1", "2", "-o", "two.svg"], "would hold one label, and 2 are asked for"),
        (["label", "1", "--start", "25"], "a sheet of 3 columns has 24 labels"),
        (["report", "1", "-o", "-", "--json"], "give -o a name"),
    ],
)
def test_what_cannot_be_meant_is_refused(
    book_path: Path, here: Path, capsys: Printed, arguments: list[str], said: str
) -> None:
    assert run(["coils", *arguments, "--book", str(book_path)]) == 2
    assert said in capsys.readouterr().err
    assert list(here.iterdir()) == []


def test_a_file_that_cannot_be_written_is_named(book_path: Path, here: Path, capsys: Printed) -> None:
    assert run(["coils", "report", "2", "-o", "no/such/folder.html", "--book", str(book_path)]) == 1
    assert "folder.html cannot be written" in capsys.readouterr().err


def test_a_report_and_labels_are_held_against_the_book(book_path: Path, here: Path, capsys: Printed) -> None:
    common = ["--book", str(book_path)]
    assert run(["coils", "report", "2", "-o", "two.html", *common]) == 0
    assert run(["coils", "label", "1", "3", "-o", "labels.html", *common]) == 0
    assert run(["coils", "verify", "two.html", "labels.html", *common]) == 0
    text = (here / "two.html").read_text(encoding="utf-8")
    digest = re.findall(r"[0-9a-f]{64}", text)[0]
    forged = "0" * 64 if digest[0] != "0" else "1" * 64
    (here / "two.html").write_text(text.replace(digest, forged), encoding="utf-8")
    assert run(["coils", "verify", "two.html", *common]) == 7
    assert "0002" in capsys.readouterr().out
