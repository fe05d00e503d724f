"""The cautions every report shows. They defer to local law, event rules and qualified practitioners."""

from __future__ import annotations

CAUTIONS: tuple[str, ...] = (
    "Test on closed or quiet roads, obey traffic law and look where you are going: a low head is not a test condition "
    "worth a crash.",
    "Change a position in small steps, and with a qualified fitter or clinician where there is pain or numbness.",
    "A position that wins seconds may break the event's technical rules: check the organiser's current rules.",
    "An estimate is not a guarantee.",
)
