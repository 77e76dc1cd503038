"""Whatever is in the file: a `Case`, or a `CaseError` whose every fault is a printable sentence. Never a traceback."""

from __future__ import annotations

import json
from pathlib import Path

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from ibsolver.case import load_case, read_case_text
from ibsolver.case.cautions import cautions
from ibsolver.case.encode import case_hash, decode, encode
from ibsolver.case.encoder import read_encoder
from ibsolver.case.outline_file import read_outline
from ibsolver.case.schema import SECTIONS
from ibsolver.case.template import KINDS, OUTLINE_CSV, new_case
from ibsolver.case.values import ValueFault
from ibsolver.errors import CaseError

QUICK = settings(max_examples=250, derandomize=True, deadline=5000, suppress_health_check=[HealthCheck.function_scoped_fixture])
TEXTS = [new_case(kind) for kind in sorted(KINDS)]
NAMES = sorted({key.name for section in SECTIONS for key in section.keys})
UNITS = ["mm", "deg", "mm/s", "degC", "kg/m3", "kg/m2", "m2/s", "s", "N m/rad", "Hz", ""]
PIECES = [b"\n", b'"', b"9", b"-", b".", b"[", b"]", b"e", b"{", b"#", b" = "]
HEADS = [f"[[{s.name}]]" if s.array else f"[{s.name}]" for s in SECTIONS if s.name and not s.nested]


def check(make):
    """Call `make`; whatever it gives must be sound."""
    try:
        case = make()
    except CaseError as error:
        assert error.faults and str(error).replace("\n", "").isprintable()
        assert all(fault.problem and fault.line >= 0 for fault in error.faults)
        return
    assert decode(json.loads(json.dumps(encode(case), allow_nan=False))) == case
    assert len(case_hash(case)) == 16 and all(cautions(case))


@QUICK
@given(st.binary(max_size=200))
def test_any_bytes(tmp_path, data):
    path = tmp_path / "case.toml"
    path.write_bytes(data)
    check(lambda: load_case(path))


@QUICK
@given(st.sampled_from(TEXTS), st.data())
def test_mutated_bytes_of_good_cases(tmp_path, text, data):
    (tmp_path / "outline.csv").write_text(OUTLINE_CSV)
    content = bytearray(text.encode())
    for _ in range(data.draw(st.integers(1, 6))):
        at = data.draw(st.integers(0, len(content) - 1))
        kind = data.draw(st.integers(0, 2))
        if kind == 0:
            content[at] = data.draw(st.integers(0, 255))
        elif kind == 1:
            del content[at : at + data.draw(st.integers(1, 20))]
        else:
            content[at:at] = data.draw(st.sampled_from(PIECES))
        if not content:
            break
    path = tmp_path / "case.toml"
    path.write_bytes(bytes(content))
    check(lambda: load_case(path))


_values = st.one_of(
    st.floats().map(repr),
    st.floats(0, 30).map(repr),
    st.integers(-(10**30), 10**30).map(str),
    st.sampled_from(
        ["true", "[]", "{}", '""', "1979-05-27", "[1, 2]", '["3 deg", "80 deg"]', '{kind = "ramp", to = "5 deg"}',
         '{kind = "oscillation", amplitude = 0.1, reduced_frequency = 1}', '{condition = "no slip", speed = 1}',
         "1e400", '"slip"', '"smooth"', '"impulsive"', '"hold acceleration"', '"no slip"',
         '"free"', '"driven"', '"fixed"', '"periodic"',
         '"fresh water"', '"air"', '"given"', '"x.csv"', '"plate"', '"upper"', '"inflow"', '"rest"', '"taylor green"'],
    ),
    st.tuples(st.floats(), st.sampled_from(UNITS)).map(lambda pair: f'"{pair[0]!r} {pair[1]}"'),
    st.tuples(st.integers(1, 90), st.sampled_from(UNITS)).map(lambda pair: f'"{pair[0]} {pair[1]}"'),
)  # fmt: skip
_row = st.one_of(st.sampled_from(HEADS), st.tuples(st.sampled_from(NAMES), _values).map(" = ".join))


@QUICK
@given(st.sampled_from(["", *TEXTS]), st.lists(_row, max_size=25))
def test_known_keys_with_any_values(start, rows):
    check(lambda: read_case_text(start + "\n".join(rows)))


@QUICK
@given(st.sampled_from(TEXTS), st.data())
def test_one_value_of_a_good_case_replaced(tmp_path, text, data):
    (tmp_path / "outline.csv").write_text(OUTLINE_CSV)
    lines = text.split("\n")
    rows = [number for number, line in enumerate(lines) if " = " in line]
    for _ in range(data.draw(st.integers(1, 4))):
        number = data.draw(st.sampled_from(rows))
        lines[number] = lines[number].lstrip("# ").split(" = ")[0] + " = " + data.draw(_values)
    check(lambda: read_case_text("\n".join(lines), folder=tmp_path))


@QUICK
@given(st.one_of(st.binary(max_size=120), st.text(alphabet="0123456789.,;-+e#\"'\n nax", max_size=120).map(str.encode)))
def test_any_csv(tmp_path, data):
    (tmp_path / "any.csv").write_bytes(data)
    for read in (read_encoder, read_outline):
        try:
            assert read("any.csv", tmp_path)
        except ValueFault as error:
            assert error.problem and str(error).isprintable()


@QUICK
@given(st.text(max_size=40))
def test_any_file_name(tmp_path, name):
    folder = Path(tmp_path)
    try:
        read_encoder(name, folder)
    except ValueFault as error:
        assert error.problem
