"""The answer in a sentence, with only the digits its interval allows."""

from __future__ import annotations

from collections.abc import Sequence

from ridercda.drag.estimate import Difference, Estimate
from ridercda.drag.verdict import Verdict
from ridercda.session.document import Session, Setup
from ridercda.units.display import digits_for, format_number


def called(setup: Setup) -> str:
    """Return what a setup is called in a sentence: its letter, else its name, else its id."""
    return setup.letter or setup.name or setup.id


def difference_sentence(difference: Difference, session: Session) -> str:
    """Return what one difference allows one to say."""
    one, other = (called(session.setup(s)) for s in (difference.setup, difference.against))
    if difference.cda is None or difference.verdict is None:
        return f"{one} and {other} cannot be compared: {difference.reason}."
    low, high = difference.cda.interval
    digits = digits_for(0.5 * (high - low))
    size = [format_number(abs(v), digits) for v in (difference.cda.value, low, high)]
    match difference.verdict:
        case Verdict.LOWER:
            return f"{one} is lower than {other} by {size[0]} m², between {size[2]} and {size[1]}."
        case Verdict.HIGHER:
            return f"{one} is higher than {other} by {size[0]} m², between {size[1]} and {size[2]}."
        case Verdict.EQUIVALENT:
            return f"{one} and {other} are equivalent: what lies between them is too small to matter."
    chance = 100.0 * (difference.chance_lower or 0.0)
    detectable = format_number(difference.detectable or 0.0, digits)
    return (
        f"{one} and {other} are not separated (chance that {one} is the lower: {chance:.0f} %); "
        f"this day could have seen {detectable} m²."
    )


def answer(estimate: Estimate, session: Session) -> str:
    """Return the day's answer: the clearest difference from the baseline, or why there is none."""
    told = [d for d in estimate.differences if d.cda is not None]
    if not estimate.answers:
        reasons: Sequence[str] = [s.reason for s in estimate.setups if s.reason]
        return f"This day cannot answer: {reasons[0]}." if reasons else "This day cannot answer."
    if not told:
        return "There is one setup, so there is nothing to compare."
    base = session.baseline
    against_base = [d for d in told if base is not None and d.against == base.id] or told
    clear = [d for d in against_base if d.verdict in (Verdict.LOWER, Verdict.HIGHER)]
    best = min(clear or against_base, key=lambda d: d.cda.value if d.cda else 0.0)
    return difference_sentence(best, session)
