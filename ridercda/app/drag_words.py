"""The drag page in words: sentences, verdicts and names of causes, from an estimate (no painting)."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QCoreApplication

from ridercda.app.figures import bounds_text, decimals_for, half_width
from ridercda.app.letters import Badge
from ridercda.app.quantities import plain
from ridercda.drag.estimate import Difference, Estimate, Figure
from ridercda.drag.verdict import Verdict


def _tr(text: str) -> str:
    return QCoreApplication.translate("Drag", text)


@dataclass(frozen=True, slots=True)
class Answer:
    """The answer as a sentence, and what else must be said."""

    sentence: str
    beside: str


def difference_from_baseline(estimate: Estimate | None, setup: str, baseline: str) -> Figure | None:
    """Return the difference of a setup from the baseline, if it is known."""
    found = difference_of(estimate, setup, baseline)
    return found.cda if found else None


def difference_of(estimate: Estimate | None, setup: str, against: str) -> Difference | None:
    """Return the pair's difference as it stands in the estimate."""
    if estimate is None:
        return None
    return next((d for d in estimate.differences if d.setup == setup and d.against == against), None)


def against_baseline(estimate: Estimate, baseline: str) -> tuple[Difference, ...]:
    """Return the differences from the baseline, the lowest first; those without a figure come last."""
    pairs = [d for d in estimate.differences if d.against == baseline]
    return tuple(sorted(pairs, key=lambda d: (d.cda is None, d.cda.value if d.cda else 0.0)))


def verdict_words(difference: Difference) -> str:
    """Return what may be said of a pair, one ladder of words for all pages."""
    return {
        Verdict.LOWER: _tr("lower"),
        Verdict.HIGHER: _tr("higher"),
        Verdict.EQUIVALENT: _tr("equivalent"),
        Verdict.NOT_SEPARATED: _tr("not separated"),
        None: _tr("no figure"),
    }[difference.verdict]


def answer(estimate: Estimate, badges: dict[str, Badge], baseline: str) -> Answer:
    """Return the answer first: what is lower than the baseline, by how much, and how sure that is."""
    pairs = [pair for pair in against_baseline(estimate, baseline) if pair.setup in badges]
    if not pairs:
        return _single(estimate, badges)
    base = badges[baseline].letter
    clear = [pair for pair in pairs if pair.verdict is Verdict.LOWER and pair.cda]
    if clear:
        sentence = _sentence(
            _tr("{setup} is lower than {base} by {value} m², between {low} and {high}."),
            clear[0],
            badges,
            base,
        )
        rest = [pair for pair in pairs if pair is not clear[0]]
    else:
        higher = [pair for pair in pairs if pair.verdict is Verdict.HIGHER and pair.cda]
        if higher and len(higher) == len(pairs):
            first = higher[0]
            sentence = _sentence(
                _tr("{base} stands: {setup} is higher by {value} m², between {low} and {high}."),
                first,
                badges,
                base,
            )
            rest = higher[1:]
        else:
            named = _listed(
                [badges[pair.setup].letter for pair in pairs if pair.verdict is Verdict.NOT_SEPARATED]
            )
            sentence = (
                _tr("No setup is clearly lower than {base} yet.").format(base=base)
                if named
                else _tr("No setup differs from {base} by enough to matter.").format(base=base)
            )
            rest = pairs
    return Answer(sentence, " ".join(_beside(rest, badges, base)))


def _sentence(text: str, pair: Difference, badges: dict[str, Badge], base: str) -> str:
    assert pair.cda is not None
    decimals = decimals_for(half_width(pair.cda.interval))
    ends = sorted(abs(end) for end in pair.cda.interval)
    return text.format(
        setup=badges[pair.setup].letter,
        base=base,
        value=plain(abs(pair.cda.value), decimals),
        low=plain(ends[0], decimals),
        high=plain(ends[1], decimals),
    )


def _single(estimate: Estimate, badges: dict[str, Badge]) -> Answer:
    """Return the answer where there is nothing to compare."""
    known = [s for s in estimate.setups if s.cda and s.id in badges]
    if not known:
        reasons = " ".join(dict.fromkeys(s.reason for s in estimate.setups if s.reason))
        return Answer(_tr("These runs give no drag figure."), reasons)
    setup = known[0]
    assert setup.cda is not None
    low, high = bounds_text(setup.cda.interval)
    value = plain(setup.cda.value, decimals_for(half_width(setup.cda.interval)))
    text = _tr("{setup} has a CdA of {value} m², between {low} and {high}.")
    return Answer(
        text.format(setup=badges[setup.id].letter, value=value, low=low, high=high),
        _tr(
            "A second setup, ridden in turn with this one, gives a difference, which is far surer than a level."
        ),
    )


def _beside(pairs: list[Difference], badges: dict[str, Badge], base: str) -> list[str]:
    words = []
    lower = _listed([badges[p.setup].letter for p in pairs if p.verdict is Verdict.LOWER])
    if lower:
        words.append(
            _tr("{} lower too.").format(_is_are(lower, [p for p in pairs if p.verdict is Verdict.LOWER]))
        )
    higher = [p for p in pairs if p.verdict is Verdict.HIGHER]
    if higher:
        names = _listed([badges[p.setup].letter for p in higher])
        words.append(_tr("{} higher than {}.").format(_is_are(names, higher), base))
    equal = [p for p in pairs if p.verdict is Verdict.EQUIVALENT]
    if equal:
        names = _listed([badges[p.setup].letter for p in equal])
        words.append(
            _tr("{} equivalent to {}: what lies between them is too small to matter.").format(
                _is_are(names, equal), base
            )
        )
    open_pairs = [p for p in pairs if p.verdict is Verdict.NOT_SEPARATED]
    if len(open_pairs) == 1:
        pair = open_pairs[0]
        letter = badges[pair.setup].letter
        words.append(_tr("{} and {} are not separated").format(letter, base) + _chance(pair, letter) + ".")
        if pair.detectable is not None and pair.cda is not None:
            decimals = decimals_for(half_width(pair.cda.interval))
            words.append(_tr("This day could have seen {} m².").format(plain(pair.detectable, decimals)))
    elif open_pairs:
        names = _listed([badges[p.setup].letter for p in open_pairs])
        words.append(_tr("{} are not separated from {}.").format(names, base))
    return words


def _chance(pair: Difference, letter: str) -> str:
    if pair.chance_lower is None:
        return ""
    return _tr(" (chance that {} is the lower: {} %)").format(letter, plain(100 * pair.chance_lower, 0))


def _is_are(names: str, pairs: list[Difference]) -> str:
    return _tr("{} are").format(names) if len(pairs) > 1 else _tr("{} is").format(names)


def _listed(names: list[str]) -> str:
    if len(names) < 2:
        return "".join(names)
    return _tr("{} and {}").format(", ".join(names[:-1]), names[-1])


def cause_words(cause: str) -> tuple[str, str]:
    """Return the name of a share of the variance, and what it means."""
    known = {
        "repeats": (
            _tr("Repeats"),
            _tr("The rider does not sit the same way twice; more repeats help, longer runs do not."),
        ),
        "gusts": (_tr("Gusts"), _tr("Wind that changes within a run; a calmer hour or more laps help.")),
        "power": (_tr("Power meter"), _tr("Noise and scale of the power meter.")),
        "sensors": (_tr("Sensors"), _tr("Noise of power and speed.")),
        "rolling": (
            _tr("Rolling"),
            _tr("What cannot be told from rolling resistance; runs at a second speed help."),
        ),
        "profile": (_tr("Course profile"), _tr("Rises and falls of the venue that the laps must reveal.")),
        "wind": (_tr("Wind"), _tr("The mean wind, which drifts through the day.")),
        "prior": (
            _tr("Beforehand"),
            _tr("What is only known beforehand, such as temperature effects on tyres."),
        ),
    }
    return known.get(cause, (cause.replace("-", " ").capitalize(), ""))
