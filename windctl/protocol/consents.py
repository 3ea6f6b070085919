"""Consents are used up: what may happen once per consent is sent once, however often it is wanted."""

from __future__ import annotations

from collections.abc import Hashable

from windctl.protocol.messages import HostMessage

Kind = type[HostMessage]


class Consents:
    """Which consent each kind of command was last sent for.

    A consent is used up when its command is first sent, whatever becomes of it. Only a refusal, which says
    that nothing was done, gives it back, and then only to whoever asks anew: the want must have gone away in
    between. Otherwise a guard closed after a refused Go would start the spindle.
    """

    __slots__ = ("_given_back", "_used")

    def __init__(self) -> None:
        self._used: dict[Kind, Hashable] = {}
        self._given_back: set[Kind] = set()

    def wanted(self, kind: Kind, consent: Hashable | None) -> bool:
        """Note what is wanted now, also that nothing is. True: a refused one may be asked for anew."""
        if kind not in self._given_back or consent == self._used.get(kind):
            return False
        self._given_back.discard(kind)
        del self._used[kind]
        return True

    def good(self, kind: Kind, consent: Hashable | None) -> bool:
        """Whether this consent has not been used."""
        return consent is not None and self._used.get(kind) != consent

    def use(self, kind: Kind, consent: Hashable) -> None:
        """The command goes out."""
        self._used[kind] = consent
        self._given_back.discard(kind)

    def refused(self, kind: Kind) -> None:
        """The board has done nothing."""
        if kind in self._used:
            self._given_back.add(kind)
