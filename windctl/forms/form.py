"""What every form is made of: a frozen model without unknown keys, numbers with units, checks across keys."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Annotated, Any, Self, TypeVar

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, model_validator
from pydantic_core import PydanticCustomError

from windctl.forms.faults import Fault, KeysDisagreeError

Check = TypeVar("Check", bound=Callable[[Any], Iterator[Fault]])


def check(method: Check) -> Check:
    """Mark a method of a form as a check across keys. It yields faults, with paths relative to its form."""
    method.__dict__["is_form_check"] = True
    return method


class Form(BaseModel):
    """Base of all tables of a form. Frozen; unknown keys, NaN, infinity and a bool for a number are errors.

    A whole number is taken where a number is asked for, never the other way round.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True, allow_inf_nan=False)

    def faults(self, *, partial: bool = False) -> Iterator[Fault]:
        """What does not go together.

        `partial`: some keys are unset because they are invalid themselves; checks that rest on them, or on
        something that cannot be worked out without them, are left out.
        """
        members = (member for kind in type(self).__mro__ for member in vars(kind).items())
        checks = dict.fromkeys(name for name, member in members if getattr(member, "is_form_check", False))
        for name in checks:
            try:
                yield from list(getattr(self, name)())
            except (AttributeError, ValueError):
                if not partial:
                    raise

    @model_validator(mode="after")
    def _keys_go_together(self) -> Self:
        faults = list(self.faults())
        if faults:
            raise KeysDisagreeError(faults)
        return self


def quantity(unit: str, about: str, **limits: Any) -> Any:
    """Field metadata of a number: its unit, its meaning and its limits (`gt`, `ge`, `lt`, `le`)."""
    return Field(
        description=f"{about} [{unit}]" if unit else about, json_schema_extra={"unit": unit}, **limits
    )


def about(text: str, **more: Any) -> Any:
    """Field metadata of anything that is not a number."""
    return Field(description=text, **more)


def _shown_safely(text: str) -> str:
    if not text.strip():
        raise PydanticCustomError("text_empty", "is empty")
    for c in text:
        if not c.isprintable():
            shown = c.encode("unicode_escape").decode("ascii")
            raise PydanticCustomError("text_control", f"holds the unprintable character {shown}")
    return text


def _shown_safely_in_lines(text: str) -> str:
    for line in text.replace("\t", " ").splitlines():
        if line.strip():
            _shown_safely(line)
    return text


# Text goes to terminals, labels and reports as it is, so it must not carry control characters.
Line = Annotated[str, Field(max_length=80), AfterValidator(_shown_safely)]
Lines = Annotated[str, Field(max_length=4000), AfterValidator(_shown_safely_in_lines)]

FormatOne = Annotated[int, Field(ge=1, le=1, description="Version of this form; 1 is the only one so far.")]
