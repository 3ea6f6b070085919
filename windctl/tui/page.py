"""One page of the book's list."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead

PAGE = 100


@dataclass(frozen=True, slots=True)
class Page:
    """One page of the book's list, and how many coils there are in all."""

    heads: tuple[CoilHead, ...]
    total: int
    number: int

    @property
    def pages(self) -> int:
        """How many pages there are; at least one."""
        return max(1, -(-self.total // PAGE))
