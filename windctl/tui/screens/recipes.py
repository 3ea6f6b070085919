"""The first room: recipes, each with what is wrong with it, and what the chosen one will be."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual import on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.content import Content
from textual.widgets import OptionList, Static
from textual.widgets.option_list import Option

from windctl.desk.words import number
from windctl.errors import WindctlError
from windctl.tui.before_words import figures_of
from windctl.tui.cards import card_of
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.say import Say
from windctl.tui.dialogs.typed import Figure
from windctl.tui.keymap import key
from windctl.tui.looks import FITS
from windctl.tui.pictures.section import Filled
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.between import Between
from windctl.tui.screens.wind import WindScreen
from windctl.tui.view import bands
from windctl.tui.widgets.bobbin_section import BobbinSection
from windctl.tui.widgets.curve import Curve
from windctl.tui.widgets.figures import Figures

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.tui.recipes import Listed, Preview
    from windctl.tui.session import Run, Session


class RecipesScreen(Between):
    """Moving through the list shows each coil as it will be; Enter goes on to the machine."""

    ABOUT = (
        "The recipes within reach: in the folder you are in, in its folder recipes, and in your own. "
        "On the right the coil as it will be, before any wire is cut."
    )
    HERE = "recipes"
    BINDINGS: ClassVar[list[BindingType]] = [
        key("recipes.wind"),
        key("recipes.resume"),
        key("recipes.reload", show=False),
    ]

    def body(self) -> ComposeResult:
        """The list, and the chosen coil."""
        yield Static("", id="open-notice", markup=False)
        with Horizontal(id="recipes-body"):
            with Vertical(id="recipes-left"):
                yield OptionList(id="recipe-list", markup=False)
            with Vertical(id="recipe-preview"):
                yield Static("", id="preview-name", markup=False)
                yield Figures(id="preview-figures")
                yield BobbinSection(id="preview-section")
                yield Curve(id="preview-curve")
                yield Static("", id="preview-cautions", markup=False)

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.recipes: list[Listed] = []
        self.chosen: Preview | None = None
        self.open: tuple[CoilHead, ...] = ()

    def action_back(self) -> None:
        """There is nothing before the first room."""

    def repaint(self) -> None:
        """Other colours; the cursor stays where it is."""
        options = self.query_one("#recipe-list", OptionList)
        at = options.highlighted
        self.show_recipes(self.recipes)
        options.highlighted = at

    def on_mount(self) -> None:
        """Look round."""
        self.action_reload()

    def on_screen_resume(self) -> None:
        """Back from a coil or a room: another may be open now, and the wire may be another."""
        self.find_open()
        at = self.query_one("#recipe-list", OptionList).highlighted
        if at is not None and at < len(self.recipes):
            self.plan(self.recipes[at])

    # ------------------------------------------------------------ looking

    def action_reload(self) -> None:
        """Look again."""
        self.find_recipes()
        self.find_open()

    @work(thread=True, exclusive=True, group="recipes")
    def find_recipes(self) -> None:
        """Read the folders."""
        found = self.session.recipes()
        self.app.call_from_thread(self.show_recipes, found)

    @work(thread=True, exclusive=True, group="open")
    def find_open(self) -> None:
        """Ask the book for open coils."""
        try:
            heads = self.session.open_coils()
        except WindctlError as error:
            self.app.call_from_thread(self.show_open, (), str(error))
        else:
            self.app.call_from_thread(self.show_open, heads)

    def show_recipes(self, found: list[Listed]) -> None:
        """Fill the list."""
        self.recipes = found
        options = self.query_one("#recipe-list", OptionList)
        options.clear_options()
        for one in found:
            glyph, role = ("✖", "bad") if one.problems else ("✔", "good")
            colour = self.app.theme_variables[f"wc-{role}"]
            options.add_option(Option(Content.assemble((f"{glyph} ", colour), Content(one.name))))
        if found:
            options.highlighted = 0
            options.focus()
        else:
            self.query_one("#preview-cautions", Static).update(
                "No recipes here. windctl recipe new NAME.toml asks for what one needs and writes it. "
                "Put recipes into the folder that you are in, or into its folder recipes, then press F5."
            )
        self.refresh_bindings()

    def show_open(self, heads: tuple[CoilHead, ...], problem: str = "") -> None:
        """Say first what was left open."""
        self.open = heads
        notice = self.query_one("#open-notice", Static)
        words = problem
        if heads:
            more = f" and {len(heads) - 1} more" if len(heads) > 1 else ""
            head = heads[0]
            words = f"◌ open: {head.number}, {head.recipe}{more}.  R goes on with it."
        notice.update(words)
        notice.set_class(bool(words), "-there")
        self.refresh_bindings()

    @on(OptionList.OptionHighlighted)
    def highlighted(self, event: OptionList.OptionHighlighted) -> None:
        """Another recipe, another coil."""
        if 0 <= event.option_index < len(self.recipes):
            self.plan(self.recipes[event.option_index])

    @work(thread=True, exclusive=True, group="plan")
    def plan(self, one: Listed) -> None:
        """Work the coil out."""
        made = self.session.preview(one)
        self.app.call_from_thread(self.show_plan, one, made)

    def show_plan(self, one: Listed, made: Preview | str) -> None:
        """Draw the coil as it will be, or say what is wrong."""
        name = self.query_one("#preview-name", Static)
        cautions = self.query_one("#preview-cautions", Static)
        figures = self.query_one(Figures)
        section = self.query_one(BobbinSection)
        curve = self.query_one(Curve)
        name.update(one.name)
        section.display = not isinstance(made, str)
        figures.display = not isinstance(made, str)
        cautions.set_class(isinstance(made, str), "-bad")
        if isinstance(made, str):
            self.chosen = None
            cautions.update(made)
            return
        self.chosen = made
        figures.show(figures_of(made.plan))
        section.show(made.growth, Filled(float(made.plan.turns)))
        curve.show(card_of(made, "").scale, [], bands(made.ahead))
        fit = FITS[made.plan.fits]
        cautions.set_class(fit.role == "good" and not made.plan.warnings, "-good")
        cautions.set_class(fit.role == "bad", "-bad")
        cautions.update(
            "\n".join([f"{fit.glyph} {fit.word}", *(f"• {words}" for words in made.plan.warnings)])
        )

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Only what can be done is offered."""
        if action == "resume":
            return bool(self.open)
        if action == "wind":
            return bool(self.recipes)
        return super().check_action(action, parameters)

    # ------------------------------------------------------------ going on

    @on(OptionList.OptionSelected)
    def selected(self) -> None:
        """Enter in the list."""
        self.action_wind()

    def action_wind(self) -> None:
        """To the machine."""
        if self.chosen is None:
            self.notify("this recipe cannot be wound: see what is wrong with it", markup=False)
            return
        self.app.push_screen(BeforeScreen(self.session, self.chosen))

    def action_resume(self) -> None:
        """Go on with the coil left open last."""
        if not self.open:
            self.notify("no coil is open", markup=False)
            return
        number = self.open[0].number
        words = (
            f"{number} is gone on with where its record ends. The board is asked where the coil stands; if "
            "it no longer knows, you will be asked for the turn."
        )
        if self.session.profile.by_eye:
            words = f"{number} is gone on with where its record ends. Where your counter differs, K tells it."
        self.app.push_screen(Confirm(f"Go on with {number}?", words), self._confirmed_resume)

    def _confirmed_resume(self, yes: bool | None) -> None:
        if yes and self.open:
            self.resume(self.open[0].number)

    @work(thread=True, exclusive=True, group="begin")
    def resume(self, number: str, at_turn: float | None = None) -> None:
        """Take the coil up."""
        try:
            run = self.session.go_on(number, at_turn)
        except WindctlError as error:
            self.app.call_from_thread(self.app.push_screen, Say("It cannot be gone on with", str(error)))
        else:
            self.app.call_from_thread(self.wind, run)

    def wind(self, run: Run) -> None:
        """To the coil."""
        self.app.push_screen(WindScreen(self.session, run))

    def ask_turn(self, coil: str, why: str) -> None:
        """The board no longer knows the turn: it is typed, and the coil taken up again."""

        def taken(line: str | None) -> None:
            turn = None if line is None else number(line)
            if turn is not None:
                self.resume(coil, turn)

        words = (
            f"{why}.\n\nCount the turns, or read the hand counter; a simulated coil is where its record ends."
        )
        self.app.push_screen(Figure(f"At which turn is {coil}?", words, "turns"), taken)
