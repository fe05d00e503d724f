"""What a reader may note of a channel that later steps act upon, so that both use the same words."""

from __future__ import annotations

from typing import Final

SPEED_FROM_SENSOR: Final = "the file lists a wheel speed sensor"
NO_SPEED_SENSOR: Final = "the file lists its sensors, and none of them measures speed"
