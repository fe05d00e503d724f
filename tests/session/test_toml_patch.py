from __future__ import annotations

import tomllib

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ridercda.session.toml_patch import TomlTable, matches, patch, same
from ridercda.session.toml_text import cut

DAY = """\
# Written by hand.\x20\x20
format = 1
name   =  'Quarry loop'  # the old one

# the rider
[rider]
mass = "165 lb" # all-up
  id = "r1"
# critical_power = "280 W"

[ venue ]
kind="loop"

# ------ rides ------

# first thing
[[ride]]
id = "am"
file = "rides/am.csv"
columns = { power = "Watts",  speed = 'km/h [x]' }

[[run]]
id = "1"
start = "0:05:10"
# a car
[[run.exclude]]
start = 10
end = 20

# the good one
[[run]]
id = "2"
laps = [
  1.0,  # ] not the end
  2.0,
]
[run.air]
temperature = "18 degC"
[[run]]
id = "3"
air.temperature = "19 degC"
note = \"\"\"two
[[run]] lines, not a header \\\"\"\" \"\"\"\"

# the end
"""

TEXTS = [
    DAY,
    DAY.replace("\n", "\r\n"),
    DAY.rstrip(),
    "",
    "\n\n",
    "# only a comment",
    "a = 1",
    "[[run]]\nid = '1'\n[setup]\n[run.air]\nx = 1\n[[run]]\nid = '2'",
    "run = [{id = '1', air = {t = 1}}, {id = '2'}]\n",
    "[[air.reading]]\ntime = 1\n[[air.reading]]\ntime = 1\n",
    '"quoted.key" = 1\n\'a b\'."c#=d" = ["]", \'[\', \'\'\'x\'\'\', """"y""""]\n["x]y".z]\nt = 09:30:00\n',
]


@pytest.mark.parametrize("text", TEXTS)
def test_cutting_loses_no_byte(text: str) -> None:
    assert cut(text).text == text


@pytest.mark.parametrize("text", TEXTS)
def test_no_edit_no_change(text: str) -> None:
    content = tomllib.loads(text)
    assert patch(text, content, tomllib.loads(text)) == text


def test_tables_are_cut_with_their_path() -> None:
    paths = [block.path for block in cut(DAY).blocks]
    assert paths == [
        (),
        ("rider",),
        ("venue",),
        ("ride", 0),
        ("run", 0),
        ("run", 0, "exclude", 0),
        ("run", 1),
        ("run", 1, "air"),
        ("run", 2),
    ]


def edited(text: str, *changes: tuple[str, str]) -> None:
    """Assert that replacing pieces of the text is all that patching to the replaced content does."""
    wanted = text
    for before, after in changes:
        assert wanted.count(before) == 1
        wanted = wanted.replace(before, after)
    assert (
        patch(text, tomllib.loads(text), tomllib.loads(wanted), ("rider", "venue", "ride", "run")) == wanted
    )


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_only_the_changed_value_is_touched(newline: str) -> None:
    day = DAY.replace("\n", newline)
    edited(day, ('"165 lb"', '"166 lb"'))
    edited(day, ("'Quarry loop'", "'Mill loop'"))
    edited(day, ('"19 degC"', '"20 degC"'))
    edited(day, ('"Watts",  speed', '"Power",  speed'))
    edited(day, (f'mass = "165 lb" # all-up{newline}', ""))
    edited(day, (f'  id = "r1"{newline}', f'  id = "r1"{newline}  w_prime = 20000.0{newline}'))


def test_a_removed_table_takes_its_own_comment_along() -> None:
    run = DAY[DAY.index("\n# the good one") : DAY.index('[[run]]\nid = "3"')]
    assert '[run.air]\ntemperature = "18 degC"\n' in run
    edited(DAY, (run, ""))
    edited(DAY, (DAY[DAY.index("\n# the rider") : DAY.index("\n[ venue ]")], ""))


def test_a_comment_set_apart_stays_when_the_table_below_it_goes() -> None:
    content = tomllib.loads(DAY)
    del content["ride"]
    text = patch(DAY, tomllib.loads(DAY), content)
    assert "# ------ rides ------" in text
    assert "# first thing" not in text


def test_a_new_item_goes_after_its_neighbour() -> None:
    edited(
        DAY,
        ("# the good one", '[[run]]\nid = "1b"\nstart = 5.0\n[run.air]\nhumidity = 0.5\n\n# the good one'),
    )


def test_a_new_table_goes_where_the_usual_order_puts_it() -> None:
    content = tomllib.loads(DAY)
    content["bike"] = {"mass": "8.5 kg"}
    content["course"] = [{"id": "tt"}]
    text = patch(DAY, tomllib.loads(DAY), content, ("rider", "bike", "venue", "ride", "run", "course"))
    assert '# critical_power = "280 W"\n\n[bike]\nmass = "8.5 kg"\n\n[ venue ]' in text
    assert text.endswith('\n[[course]]\nid = "tt"\n\n# the end\n')


def test_a_missing_last_line_end_is_mended_only_when_something_follows() -> None:
    assert patch("a = 1", {"a": 1}, {"a": 2}) == "a = 2"
    assert patch("a = 1", {"a": 1}, {"a": 1, "b": 2}) == "a = 1\nb = 2\n"
    assert patch("a = 1", {"a": 1}, {"a": 1, "t": {"b": 2}}) == "a = 1\n\n[t]\nb = 2\n"


def test_reordered_items_take_their_comments_and_sub_tables_along() -> None:
    content = tomllib.loads(DAY)
    content["run"] = [content["run"][i] for i in (1, 0, 2)]
    text = patch(DAY, tomllib.loads(DAY), content)
    assert text.index("# the good one") < text.index('temperature = "18 degC"') < text.index("# a car")
    assert sorted(text.splitlines()) == sorted(DAY.splitlines())


def test_items_are_matched_by_id_then_by_content_then_by_order() -> None:
    old: list[TomlTable] = [{"id": "a"}, {"id": "b"}, {"x": 1}, {"x": 2}]
    new: list[TomlTable] = [{"x": 2}, {"id": "b", "y": 1}, {"x": 3}, {"id": "c", "y": 2}]
    assert matches(old, new) == [3, 1, 2, None]
    assert matches([{"id": "a", "y": 1}, {"id": "b"}], [{"id": "c", "y": 1}, {"id": "d", "y": 2}]) == [
        0,
        None,
    ]


def test_one_and_true_and_one_point_zero_are_different() -> None:
    assert not same({"a": 1}, {"a": True})
    assert not same([1], [1.0])
    assert same({"a": [1, {"b": "x"}]}, {"a": [1, {"b": "x"}]})


_scalars = (
    st.text(st.characters(exclude_categories=["Cs"]), max_size=8)
    | st.integers(-(2**40), 2**40)
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.booleans()
    | st.lists(st.floats(-1e6, 1e6), max_size=3)
)
_names = st.sampled_from(["id", "mass", "air", "exclude", "file", "quoted.key", "a b"])
_leaf = st.dictionaries(_names, _scalars, max_size=3)
_item = st.dictionaries(_names, _scalars | _leaf | st.lists(_leaf, min_size=1, max_size=3), max_size=4)
_content = st.dictionaries(
    st.sampled_from(["format", "name", "rider", "venue", "ride", "run", "x]y", "course"]),
    _scalars | _item | st.lists(_item, min_size=1, max_size=4),
    max_size=6,
)


@st.composite
def _edit(draw: st.DrawFn, content: TomlTable) -> TomlTable:
    """Draw an edit of a content: some keys kept, some changed, some dropped, some new, items shuffled."""
    result: TomlTable = {}
    fresh = draw(_item)
    for key, value in content.items():
        what = draw(st.sampled_from(["keep", "keep", "edit", "drop"]))
        if what == "keep":
            result[key] = value
        elif what == "edit" and isinstance(value, dict):
            result[key] = draw(_edit(value))
        elif what == "edit" and isinstance(value, list) and value and isinstance(value[0], dict):
            items = [draw(_edit(item)) for item in draw(st.permutations(value))[: draw(st.integers(1, 9))]]
            result[key] = [*items, *draw(st.lists(_item, max_size=1))]
        elif what == "edit":
            result[key] = draw(_scalars)
    for key, value in fresh.items():
        result.setdefault(key, value)
    return result


@given(st.data())
@settings(max_examples=300, deadline=None)
def test_the_patched_text_holds_the_new_content(data: st.DataObject) -> None:
    text = data.draw(st.sampled_from(TEXTS))
    old = tomllib.loads(text)
    new = data.draw(_edit(old) | _content)
    result = patch(text, old, new, ("rider", "venue", "ride", "run"))
    assert same(tomllib.loads(result), new)
    assert patch(result, new, tomllib.loads(result)) == result
