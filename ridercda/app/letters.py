"""Which letter and colour a setup has: its own letter, else the first that is free, in the order of the session."""

from __future__ import annotations

import string
from dataclasses import dataclass

from ridercda.session.document import Session


@dataclass(frozen=True, slots=True)
class Badge:
    """How a setup is shown everywhere."""

    index: int  # place in the session, which decides its colour
    letter: str
    name: str


def badges(session: Session) -> dict[str, Badge]:
    """Return the badge of each setup by id."""
    taken = {setup.letter for setup in session.setups if setup.letter}
    free = (letter for letter in string.ascii_uppercase if letter not in taken)
    result: dict[str, Badge] = {}
    for index, setup in enumerate(session.setups):
        letter = setup.letter or next(free, str(index + 1))
        result[setup.id] = Badge(index, letter, setup.name or setup.id)
    return result


def next_letter(session: Session) -> str:
    """Return the letter a further setup would get."""
    taken = {badge.letter for badge in badges(session).values()}
    return next((letter for letter in string.ascii_uppercase if letter not in taken), "")
