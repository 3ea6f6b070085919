"""A small stock of demo coils as the book has them, without winding each: facts, seal and lesson."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from pathlib import Path

from tests.book.samples import finished, packed, seal, started, wound
from windctl import __version__
from windctl.book.book import Book
from windctl.plan.experience.lesson import Lesson, Measured, Resistance
from windctl.plan.make import make_plan
from windctl.plan.model import Plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import parse_recipe
from windctl.record.addenda import CoilTaught
from windctl.record.events import CountCorrected, Event

ROOT = Path(__file__).resolve().parents[2]
NORTH, SOUTH = "hum-pair-north.toml", "hum-pair-south.toml"


@cache
def planned(recipe: str, text: str) -> Plan:
    """The plan of a recipe's text on the virtual machine, as drawn up once."""
    return make_plan(parse_recipe(text, recipe), VIRTUAL)


@dataclass(frozen=True)
class Demo:
    """A coil of a ready recipe. `off`: its resistance against the plan's, relative."""

    recipe: str
    turns: int = 5000
    off: float = 0.0
    spool: str = "s1"
    batch: str = ""
    magnet: bool = True
    simulated: bool = False
    corrected: bool = False
    outcome: str = "finished"
    measured: tuple[Measured, ...] = ()

    @property
    def text(self) -> str:
        """The recipe's text, the line about its magnet left out where nobody said."""
        text = (ROOT / "recipes" / self.recipe).read_text(encoding="utf-8")
        if self.magnet:
            return text
        return "\n".join(line for line in text.splitlines() if not line.startswith("magnet_up"))


def keep(book: Book, n: int, demo: Demo) -> str:
    """Coil `n` of bench b1 in the book; its number."""
    plan = planned(demo.recipe, demo.text)
    first = started(
        n,
        wall_time=f"2026-05-04T{8 + n // 60:02d}:{n % 60:02d}:00+02:00",
        recipe_name=plan.recipe_name,
        recipe_text=demo.text,
        prior=plan.prior,
        basis=plan.basis,
        spool=demo.spool,
        batch=demo.batch,
    )
    with book.begin_coil("b1", 2026, first) as writer:
        events: list[Event] = wound(writer.started, 1)
        if demo.corrected:
            events.append(CountCorrected(2000, 1.0, "Demo Winder", "counted again"))
        last = finished(demo.turns, outcome=demo.outcome, dcr_20c_ohm=plan.dcr_20c_ohm)
        writer.commit(packed([*events, last]))
        head = seal(book, writer)
    coil = plan.basis.coil
    ohm = plan.basis.ohm_per_m * coil.wire_length_m(demo.turns) * (1 + demo.off)
    lesson = Lesson(
        coil=head.number,
        bench="b1",
        spool=demo.spool,
        basis=plan.basis,
        turns=float(demo.turns),
        meter_rel=0.004,
        measured=(Resistance(ohm, 0.002), *demo.measured),
        simulated=demo.simulated,
    )
    book.amend(head.number, CoilTaught(__version__, lesson))
    return head.number


def stocked(book: Book, *demos: Demo) -> list[str]:
    """All of them, in order; their numbers."""
    return [keep(book, n, demo) for n, demo in enumerate(demos, 1)]
