from __future__ import annotations

import math

import pytest

from ridercda.session.defaults import DEFAULTS, default, default_row, default_word, markdown_table


def test_keys_stand_once() -> None:
    keys = [row.key for row in DEFAULTS]
    assert len(keys) == len(set(keys))


def test_every_row_says_what_it_is_and_where_it_comes_from() -> None:
    for row in DEFAULTS:
        assert row.text.endswith(".")
        assert row.source
        assert isinstance(row.value, str) or math.isfinite(row.value)
        assert (row.unit == "") == isinstance(row.value, str)


def test_numbers_and_words_are_told_apart() -> None:
    assert default("bike.wheel_inertia") == 0.14
    assert default_word("power_meter.location") == "crank"
    with pytest.raises(KeyError, match="is a word"):
        default("power_meter.location")
    with pytest.raises(KeyError, match="is a number"):
        default_word("bike.wheel_inertia")
    with pytest.raises(KeyError, match="nowhere"):
        default_row("nowhere")


def test_the_table_for_the_documentation_has_every_key() -> None:
    table = markdown_table()
    for row in DEFAULTS:
        assert f"`{row.key}`" in table
    assert table.count("\n") == len(DEFAULTS) + 2
