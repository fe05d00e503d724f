from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from ridercda.app.colours import DARK, DARK_CHIPS, LIGHT, LIGHT_CHIPS, Chip, Roles, channels, contrast, mixed

THEMES = [pytest.param(LIGHT, LIGHT_CHIPS, id="light"), pytest.param(DARK, DARK_CHIPS, id="dark")]

# Dichromats' sight in linear RGB: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, "A physiologically-based model
# for simulation of color vision deficiency," IEEE TVCG 15(6), 1291-1298, 2009, severity 1.0 (from memory).
SIGHTS = {
    "normal": np.eye(3),
    "protan": np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    "deutan": np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
    ),
    "tritan": np.array(
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]]
    ),
}


def perceived(colour: str, sight: np.ndarray) -> np.ndarray:
    """Return a colour in Oklab (B. Ottosson, 2020; from memory), as someone with this sight sees it."""
    red, green, blue = np.clip(sight @ np.array(channels(colour)), 0.0, 1.0)
    long = np.cbrt(0.4122214708 * red + 0.5363325363 * green + 0.0514459929 * blue)
    middle = np.cbrt(0.2119034982 * red + 0.6806995451 * green + 0.1073969566 * blue)
    short = np.cbrt(0.0883024619 * red + 0.2817188376 * green + 0.6299787005 * blue)
    return np.array(
        [
            0.2104542553 * long + 0.7936177850 * middle - 0.0040720468 * short,
            1.9779984951 * long - 2.4285922050 * middle + 0.4505937099 * short,
            0.0259040371 * long + 0.7827717662 * middle - 0.8086757660 * short,
        ]
    )


def nearest(chips: tuple[Chip, ...], sight: np.ndarray) -> float:
    seen = [perceived(chip.fill, sight) for chip in chips]
    return min(float(np.linalg.norm(a - b)) for a, b in combinations(seen, 2))


def test_contrast_of_black_and_white_is_21() -> None:
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)  # WCAG 2.2, definition of contrast ratio
    assert contrast("#777777", "#777777") == pytest.approx(1.0)
    assert contrast("#767676", "#ffffff") == pytest.approx(
        4.54, abs=0.005
    )  # the grey known to just pass 4.5:1


@pytest.mark.parametrize(("roles", "chips"), THEMES)
def test_every_letter_reaches_4_5_on_its_chip_and_every_chip_3_on_the_card(
    roles: Roles, chips: tuple[Chip, ...]
) -> None:
    assert len(chips) == 12
    assert len({chip.fill for chip in chips}) == 12
    for chip in chips:
        assert contrast(chip.fill, chip.text) >= 4.5, chip
        assert contrast(chip.fill, roles.card) >= 3.0, chip


@pytest.mark.parametrize(("roles", "chips"), THEMES)
@pytest.mark.parametrize("role", ["ink", "quiet", "accent", "good", "caution", "bad"])
def test_text_reaches_4_5_on_every_ground_it_stands_on(
    roles: Roles, chips: tuple[Chip, ...], role: str
) -> None:
    for ground in ("paper", "card", "chosen", "field", "hover"):
        assert contrast(getattr(roles, role), getattr(roles, ground)) >= 4.5, ground


@pytest.mark.parametrize(("roles", "chips"), THEMES)
def test_pairs_of_their_own_ground_reach_4_5_and_lines_3(roles: Roles, chips: tuple[Chip, ...]) -> None:
    assert contrast(roles.on_accent, roles.accent) >= 4.5
    assert contrast(roles.caution, roles.caution_ground) >= 4.5
    assert contrast(roles.ink, roles.caution_ground) >= 4.5
    assert contrast(roles.ink, roles.bad_ground) >= 4.5
    for line in ("axis", "power", "speed", "accent"):
        assert contrast(getattr(roles, line), roles.card) >= 3.0, line


@pytest.mark.parametrize("sight", SIGHTS)
@pytest.mark.parametrize(("roles", "chips"), THEMES)
def test_six_hues_are_told_apart_in_every_sight(roles: Roles, chips: tuple[Chip, ...], sight: str) -> None:
    # 0.02 in Oklab is about a just noticeable difference side by side; marks stand apart, so four times that.
    assert nearest(chips[:6], SIGHTS[sight]) >= 0.08
    assert nearest(chips[6:], SIGHTS[sight]) >= 0.055
    assert not any(chip.hatched for chip in chips[:6])
    assert all(chip.hatched for chip in chips[6:])


def test_mixing_goes_from_one_end_to_the_other() -> None:
    assert mixed("#102030", "#ffffff", 0.0) == "#102030"
    assert mixed("#102030", "#ffffff", 1.0) == "#ffffff"
    assert mixed("#000000", "#ffffff", 0.5) in ("#808080", "#7f7f7f")
