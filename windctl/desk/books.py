"""Opening the coil book that a command means."""

from __future__ import annotations

import os
from contextlib import AbstractContextManager, nullcontext
from typing import TYPE_CHECKING

from windctl.desk.log import note
from windctl.errors import BookOutdated

if TYPE_CHECKING:
    from pathlib import Path

    from windctl.book.book import Book
    from windctl.desk.asked import Shared


def book_if_any(shared: Shared) -> AbstractContextManager[Book | None]:
    """The book, never changed by reading it; None where no coil has been wound yet and none was named.

    Raises BookError for a book that was named and is not there.
    """
    from windctl.book.places import BOOK_VARIABLE, book_path

    path = book_path(shared.book, os.environ)
    named = shared.book is not None or bool(os.environ.get(BOOK_VARIABLE))
    if not named and not path.exists():
        return nullcontext()
    return _to_read(path)


def there_is_a_book(shared: Shared) -> bool:
    """Whether the book that is meant was made already."""
    from windctl.book.places import book_path

    return book_path(shared.book, os.environ).exists()


def where_the_book_is(shared: Shared) -> Path:
    """Where the book that is meant lies, or will."""
    from windctl.book.places import book_path

    return book_path(shared.book, os.environ)


def book_to_read(shared: Shared) -> Book:
    """The book, never changed by reading it. Raises BookError where there is none."""
    from windctl.book.places import book_path

    return _to_read(book_path(shared.book, os.environ))


def _to_read(path: Path) -> Book:
    """A book of an older windctl is taken forward first; as it was, it stays beside itself."""
    from windctl.book.open import open_book

    try:
        return open_book(path, create=False, readonly=True)
    except BookOutdated:
        open_book(path, create=False).close()
        note(f"{path} was taken forward to this version's schema")
        return open_book(path, create=False, readonly=True)


def book_to_write(shared: Shared) -> Book:
    """The book, made if it is not there yet."""
    from windctl.book.open import open_book
    from windctl.book.places import book_path

    return open_book(book_path(shared.book, os.environ))
