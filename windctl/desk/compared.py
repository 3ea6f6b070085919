"""A coil of the book as it is compared with others."""

from __future__ import annotations

import json
import re
import tomllib
from typing import TYPE_CHECKING

from windctl.errors import WindctlError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.shop.compare import Compared

# Of a simulated machine the record also keeps how far into the spool the coil was; that is no setting.
_INTO_SPOOL = re.compile(r", \d+ coils and \d+ m into the spool$")


def gather(book: Book, head: CoilHead) -> Compared:
    """Its row, its curve and its settings. The machine's are those of the profile in the record."""
    from windctl.recipe.load import parse_recipe
    from windctl.record.events import CoilStarted
    from windctl.shop.compare import Compared, settings_of

    started = next(iter(book.events(head.number)))
    assert isinstance(started, CoilStarted)  # a record begins with it
    try:
        recipe = parse_recipe(started.recipe_text, f"the recipe of {head.number}").canonical_json()
    except WindctlError:  # of an older version, and no longer valid in this one: as it was written
        recipe = json.dumps(tomllib.loads(started.recipe_text), default=str)
    settings = settings_of(
        recipe,
        started.profile_json,
        spool=started.spool,
        machine=_INTO_SPOOL.sub("", started.machine),
        readings=started.readings_mode,
        operator=started.operator,
        windctl=started.version,
    )
    return Compared(
        head.number,
        head.recipe,
        head.started,
        head.turns,
        head.dcr_20c_ohm,
        head.dcr_u95_ohm,
        head.program_digest,
        tuple((point.turn, point.ohm_20c) for point in book.curve(head.number)),
        settings,
        still_open=not head.sealed,
    )
