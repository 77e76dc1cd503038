"""The line scanner against texts whose lines are plain to see."""

from __future__ import annotations

import tomllib

from hypothesis import given, settings
from hypothesis import strategies as st

from ibsolver.case.lines import line_of, scan_lines

TEXT = '''\
# a comment with = and [brackets]
title = "a # b"
text = """
one
two ""\\"
"""
[plate]
chord = "60 mm"   # [not a header]
"quoted key" = 1
a.b . c = 3

[[flap]]
name = 'x'
limits = [
  "3 deg", # ]
  "80 deg",
]
[[flap]]
name = "y"
motion = {kind = "ramp", to = {deep = [1, 2]}}
[flap.more]
z = 1
[ spaced . "out" ]
k = 1979-05-27 07:32:00
'''


def test_lines_of_every_kind_of_key():
    tomllib.loads(TEXT)
    lines = scan_lines(TEXT)
    due = {
        ("title",): 2,
        ("text",): 3,
        ("plate",): 7,
        ("plate", "chord"): 8,
        ("plate", "quoted key"): 9,
        ("plate", "a", "b", "c"): 10,
        ("flap", 0): 12,
        ("flap", 0, "name"): 13,
        ("flap", 0, "limits", 0): 15,
        ("flap", 0, "limits", 1): 16,
        ("flap", 1): 18,
        ("flap", 1, "name"): 19,
        ("flap", 1, "motion", "kind"): 20,
        ("flap", 1, "motion", "to", "deep", 1): 20,
        ("flap", 1, "more", "z"): 22,
        ("spaced", "out"): 23,
        ("spaced", "out", "k"): 24,
    }
    assert {path: lines.get(path) for path in due} == due


def test_line_of_a_missing_key_is_that_of_its_parent():
    lines = scan_lines("[plate]\nchord = 1\n")
    assert line_of(lines, ("plate", "span")) == 1
    assert line_of(lines, ("tow", "speed")) == 0


def _paths(data, place=()):
    if isinstance(data, dict):
        for name, value in data.items():
            yield place + (name,)
            yield from _paths(value, place + (name,))
    elif isinstance(data, list):
        for index, value in enumerate(data):
            yield place + (index,)
            yield from _paths(value, place + (index,))


_key = st.sampled_from(["a", "b", '"c d"', "e.f", "'g'"])
_value = st.recursive(
    st.sampled_from(["1", '"x # y"', "'z'", "true", "1.5", '"""m\nn"""', "[]", "{}"]),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: "[\n" + ", # c\n".join(items) + "\n]"),
        st.lists(inner, max_size=2).map(
            lambda items: "{" + ", ".join(f"k{i} = {v}" for i, v in enumerate(items) if "\n" not in v) + "}"
        ),
    ),
    max_leaves=6,
)
_line = st.one_of(
    st.tuples(_key, _value).map(lambda pair: f"{pair[0]} = {pair[1]}"),
    st.sampled_from(["[t]", "[[s]]", "[u.v]", "# note", "", "[[s.w]]"]),
)


@settings(max_examples=200, deadline=None)
@given(st.lists(_line, max_size=8))
def test_every_path_of_valid_toml_has_a_line(rows):
    text = "\n".join(rows)
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return
    lines = scan_lines(text)
    assert all(1 <= lines[path] <= text.count("\n") + 1 for path in _paths(data))


@given(st.text(alphabet="ab=[]{}.\"'#\n\\, 1", max_size=60))
def test_any_text_is_scanned_without_an_error(text):
    assert all(line >= 1 for line in scan_lines(text).values())
