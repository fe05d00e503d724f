from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from ridercda.runs.gates import Progress, fastest_gate, gate_of_presses

LAP = 1000.0


def _spell(start: float, distance: float, begin: float, sense: float = 1.0) -> Progress:
    time = begin + np.arange(0.0, distance / 10.0 + 1)
    speed = np.full(time.size, 10.0)
    return Progress(time, sense * start + 10.0 * (time - begin), speed, sense)


def test_passes_are_interpolated_between_records() -> None:
    spell = _spell(5.0, 3000.0, 100.0)
    assert_allclose(spell.passing(412.5, LAP), [100 + 40.75, 100 + 140.75, 100 + 240.75])


def test_a_spell_the_other_way_round_passes_the_same_place() -> None:
    spell = _spell(5.0, 2000.0, 0.0, sense=-1.0)  # from place 5 downwards
    assert_allclose(spell.passing(405.0, LAP), [60.0, 160.0])


def test_the_gate_is_where_most_presses_were() -> None:
    spells = [_spell(-200.0, 2300.0, 0.0), _spell(-150.0, 2300.0, 1000.0)]
    presses = [20.4, 120.9, 221.0, 1015.5, 1116.0, 1214.9]
    gate = gate_of_presses(spells, presses, LAP)
    assert gate is not None
    assert abs((gate.place + 500) % LAP - 500 - 5) < 8
    assert gate.basis == "lap button"


def test_one_press_in_the_wrong_place_does_not_move_it() -> None:
    spells = [_spell(-200.0, 4300.0, 0.0)]
    gate = gate_of_presses(spells, [20.0, 120.0, 175.0, 220.0, 320.0], LAP)
    assert gate is not None
    assert abs((gate.place + 500) % LAP - 500) < 3


@pytest.mark.parametrize("presses", [[], [20.0], [20.0, 55.0, 90.0, 130.0]])
def test_presses_without_a_place_in_common_make_no_gate(presses: list[float]) -> None:
    assert gate_of_presses([_spell(-200.0, 4300.0, 0.0)], presses, LAP) is None


def test_the_gate_found_leaves_the_most_laps() -> None:
    # From 300 before a place to 200 behind it, two laps on: only gates in between give two laps.
    spells = [_spell(700.0, 2500.0, 0.0), _spell(1700.0, 2500.0, 900.0)]
    gate = fastest_gate(spells, LAP, settle=15.0)
    assert gate.place >= 850 or gate.place <= 200
    assert all(spell.passing(gate.place, LAP).size == 3 for spell in spells)


def test_of_equal_gates_the_fastest_is_taken() -> None:
    time = np.arange(0.0, 400.0)
    speed = 10.0 + 3.0 * np.cos(2 * np.pi * np.cumsum(np.full(400, 10.0)) / LAP)
    spell = Progress(time, np.cumsum(np.full(400, 10.0)), speed)
    gate = fastest_gate([spell], LAP, settle=0.0)
    assert min(gate.place, LAP - gate.place) < 60.0
