"""What must fit together across keys: one exact sentence for each."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from ibsolver.case import checks_run
from ibsolver.case.consistency import problems, verify
from ibsolver.errors import CaseError

from .helpers import BARE, BOX, FLAP, PLATE, faults, one_fault, read

FREE = FLAP + 'mount = "free"\nmass_per_area = "1 kg/m2"\n'
REAR = FLAP.replace("front", "rear").replace("0.12", "0.6")


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        # one body
        (PLATE + "[cylinder]\ndiameter = '20 mm'\n",
         "case.toml:12: cylinder: is a second body beside [plate]; a case has one. Leave one of the two out."),
        (BARE + "[domain]\nwidth = 3\n",
         "case.toml:6: domain.width = 3: is of a box without a body. Use upstream, downstream and lateral."),
        (BOX.replace("height = 1\n", ""),
         "case.toml:3: domain.height: is missing; a box needs width and height. Write for example height = 1."),
        (BOX + FLAP, "case.toml:14: flap: needs a [plate] to be hinged on. Add [plate], or leave the flaps out."),
        (BOX + "[motion]\nheave = {kind = 'constant', value = 1}\n",
         "case.toml:15: motion.heave = {kind = \"constant\", value = 1}: moves a body, but the case has none. "
         "Leave [motion] out."),
        (BOX + "[tank]\nwall_above = 2\n",
         "case.toml:15: tank.wall_above = 2: is measured from a body, but the case has none. "
         'Write the walls as domain.top and domain.bottom = "no slip".'),
        # speed and Reynolds number
        (PLATE + "reynolds = 1000\n",
         "case.toml:12: tow.reynolds = 1000: is given beside speed; one follows from the other. Leave one out."),
        (PLATE.replace('speed = "20 mm/s"\n', ""),
         'case.toml:10: tow: needs speed or reynolds. Write for example speed = "20 mm/s".'),
        (BARE.replace("reynolds = 500", "speed = '20 mm/s'"),
         'case.toml:4: tow.speed = "20 mm/s": needs [fluid]: without a viscosity there is no Reynolds number. '
         "Add [fluid], or write reynolds instead."),
        (PLATE.replace('chord = "50 mm"\n', ""),
         'case.toml:6: plate.chord: is missing; with [fluid] it is needed for the Reynolds number. '
         'Write for example chord = "60 mm".'),
        # fluid
        (PLATE.replace('density = "1000 kg/m3"\n', ""),
         'case.toml:2: fluid.density: is missing; kind = "given" needs it. Write for example density = "998 kg/m3".'),
        (PLATE.replace('kind = "given"', 'kind = "given"\nglycerol_mass_fraction = 0.2'),
         'case.toml:4: fluid.glycerol_mass_fraction = 0.2: has no meaning for kind = "given". '
         "That kind takes density and kinematic_viscosity."),
        # motions
        (PLATE.replace("plate", "cylinder").replace("chord", "diameter").replace('incidence = "15 deg"\n', "")
         + "[motion]\nincidence = {kind = 'constant', value = '5 deg'}\n",
         'case.toml:12: motion.incidence = {kind = "constant", value = "5 deg"}: has no meaning for a circular '
         'cylinder. '
         "Use heave, or leave it out."),
        (BARE + "[motion]\nincidence = {kind = 'ramp', from = '0 deg', to = '5 deg'}\n",
         'case.toml:6: motion.incidence = {kind = "ramp", from = "0 deg", to = "5 deg"}: begins at (or swings about) '
         "0 deg, but plate.incidence is 15 deg. Leave plate.incidence out, or make the two agree."),
        # flaps
        (BARE + FLAP + REAR.replace("rear", "front"),
         'case.toml:11: flap[1].name = "front": is the name of another flap. Give each flap a name of its own.'),
        (BARE + FLAP.replace("front", "plate"),
         'case.toml:6: flap[0].name = "plate": is taken by the plate itself. Choose another, such as "front".'),
        (BARE + FLAP.replace("front", "my flap"),
         'case.toml:6: flap[0].name = "my flap": is not usable as a column\'s name. '
         'Use letters, digits, _ and -, at most 40; for example "front".'),
        (BARE + FLAP.replace("0.12", "1.2"),
         "case.toml:7: flap[0].hinge = 1.2: lies beyond the plate, whose length is 1 chords. "
         "Choose at least 0 and at most 1."),
        (BARE + FLAP + 'on = "wing"\n',
         'case.toml:10: flap[0].on = "wing": is not the name of a body to be hinged on. Known: "plate".'),
        (BARE + FLAP.replace("20 deg", "180 deg"),
         'case.toml:9: flap[0].opening = "180 deg": takes the flap through its own plate: it is counted from '
         'the plate\'s '
         "surface. At least 0 deg and less than 180 deg are allowed; for the other surface choose the other side."),
        (BARE + FLAP.replace("20 deg", "-20 deg"),
         'case.toml:9: flap[0].opening = "-20 deg": takes the flap through its own plate: it is counted from '
         'the plate\'s '
         "surface. At least 0 deg and less than 180 deg are allowed; for the other surface choose the other side."),
        (BARE + FLAP.replace("20 deg", "0 deg"),
         'case.toml:9: flap[0].opening = "0 deg": lays the flap on its own plate, where it changes nothing. '
         "Leave the flap out, or open it."),
        (BARE + FLAP + 'spring = "1 N m/rad"\n',
         'case.toml:10: flap[0].spring = "1 N m/rad": has no meaning for mount = "fixed". '
         'Leave it out, or write mount = "free".'),
        (PLATE + FREE + 'limits = ["30 deg", "80 deg"]\n',
         'case.toml:16: flap[0].opening = "20 deg": lies outside the limits 30 deg to 80 deg. Start between the '
         'stops.'),
        (PLATE + FREE + 'limits = ["-3 deg", "80 deg"]\n',
         'case.toml:19: flap[0].limits = ["-3 deg", "80 deg"]: let the flap swing through its own plate. '
         "Choose stops of at least 0 deg and at most 180 deg."),
        (PLATE + FLAP + 'mount = "free"\n',
         "case.toml:12: flap[0].mass_per_area: is missing; a free flap needs a mass (0 is allowed). "
         'Write for example mass_per_area = "1.1 kg/m2".'),
        (PLATE + FLAP + 'mount = "free"\nthickness = "1 mm"\n',
         "case.toml:12: flap[0].density: is missing; the mass of the flap is thickness times density. "
         'Write for example density = "2200 kg/m3".'),
        (PLATE + FREE + 'thickness = "1 mm"\n',
         'case.toml:18: flap[0].mass_per_area = "1 kg/m2": is given beside thickness and density. '
         "Give either the one or the two."),
        (PLATE.replace('span = "200 mm"\n', "") + FREE + 'spring = "1e-4 N m/rad"\n',
         'case.toml:18: flap[0].spring = "1e-4 N m/rad": needs [fluid], a chord, a span and a tow speed to become '
         "dimensionless. Add what is missing, or write 0."),
        (BARE + FREE,
         'case.toml:11: flap[0].mass_per_area = "1 kg/m2": needs [fluid], a chord and a tow speed to become '
         'dimensionless. '
         "Add what is missing, or write 0."),
        (BARE + FLAP + REAR.replace("0.6", "0.25").replace("20 deg", "150 deg"),
         'case.toml:10: flap[1]: flap "rear" crosses or touches flap "front". '
         "Move its hinge, shorten it, or change an opening."),
        # domain and tank
        (BARE + "[domain]\nupstream = 0.3\n",
         "case.toml:6: domain.upstream = 0.3: the body with the fine cells around it reaches the boundary, "
         "0.407 chords "
         "from the pivot. Choose more than 0.407, lower grid.core_margin, or move the body."),
        (PLATE + '[tank]\nwall_below = "9 mm"\n',
         'case.toml:13: tank.wall_below = "9 mm": the body with the fine cells around it reaches the tank wall, '
         '0.36 chords '
         "from the pivot. Choose more than 0.36, lower grid.core_margin, or move the body."),
        (BARE + "[tank]\nwall_below = '9 mm'\n",
         'case.toml:6: tank.wall_below = "9 mm": is a length, but the case has no chord to divide it by. '
         "Write it in chords."),
        (BARE + "[tank]\nwall_above = 4\n[domain]\ntop = 'no slip'\n",
         'case.toml:8: domain.top = "no slip": is given beside tank.wall_above, which is that side. Leave one out.'),
        (BARE + "[tank]\nwall_above = 4\n[domain]\nabove = 5\n",
         "case.toml:8: domain.above = 5: is given beside tank.wall_above, which is that distance. Leave one out."),
        (PLATE + "[tank]\ngravity = '9.81 m/s2'\n",
         "case.toml:12: tank.gravity_direction: is missing; gravity needs both its size and its direction. "
         'Write for example gravity_direction = "-90 deg".'),
        (BARE + "[domain]\ntop = 'periodic'\n",
         'case.toml:6: domain.top = "periodic": is periodic, but bottom is not; the two belong together. '
         'Write bottom = "periodic" as well.'),
        (BARE + "[domain]\ntop = 'inflow'\n",
         'case.toml:6: domain.top = "inflow": cannot be an inflow; the stream comes from the left. Write "slip".'),
        (BARE + "[domain]\nbottom = 'outflow'\n",
         'case.toml:6: domain.bottom = "outflow": cannot be an outflow; the stream leaves at the right. Write "slip".'),
        (BARE + "[domain]\nright = 'slip'\n",
         'case.toml:6: domain.right = "slip": must let out what comes in at the left. Write right = "outflow".'),
        (BARE + "[domain]\ntop = {condition = 'slip', speed = 1}\n",
         'case.toml:6: domain.top.speed = 1: is the speed of a wall without slip. Write condition = "no slip".'),
        (BARE + "[domain]\nright = {condition = 'outflow', profile = 'parabola'}\n",
         'case.toml:6: domain.right.profile = "parabola": is the shape of an inflow. Write condition = "inflow".'),
        (BARE + "[domain]\nright = 3\n",
         'case.toml:6: domain.right = 3: must be a condition in quotes or a side table. Write for example "slip".'),
        (BARE + "[initial]\nfield = 'rest'\n",
         'case.toml:6: initial.field = "rest": is for a box without a body. Leave it out, or write "tow".'),
        (BOX.replace('"rest"', '"taylor green"'),
         'case.toml:11: initial.field = "taylor green": needs a box that is periodic on all four sides. '
         'Write left, right, bottom and top = "periodic".'),
        (BOX.replace('"rest"', '"rest"\nstream = [1, 0]'),
         'case.toml:12: initial.stream = [1, 0]: is added to field = "taylor green" only. '
         'Leave it out, or write field = "taylor green".'),
        (BOX + "[grid]\nuniform = false\n",
         "case.toml:15: grid.uniform = false: must be true for a box; its grid is uniform. Leave it out."),
        # run and output
        (BARE + "[output]\nframe_every = 9\n",
         "case.toml:6: output.frame_every = 9: is longer than the whole run (run.travel = 8 chords). "
         "Choose at most 8, for example 0.1."),
        (BARE + "[output]\nframe_every = 2e-5\n",
         "case.toml:6: output.frame_every = 2e-05: makes 4e+05 frames; at most 100000 are written. "
         "Choose at least 8e-05."),
        (BARE + "[grid]\nlargest_cell = 0.01\n",
         "case.toml:6: grid.largest_cell = 0.01: is smaller than the cells of the core, 0.01562 chords. "
         "Choose a larger one, such as 0.5."),
        (BARE + "[run]\nfixed_step = 0.1\n",
         "case.toml:6: run.fixed_step = 0.1: is longer than 0.7 cells of the core a step: unstable whatever the flow. "
         "Choose less than 0.0109."),
        (BARE + "[grid]\ncells_per_chord = 2000\nuniform = true\n",
         "case.toml:6: grid.cells_per_chord = 2000: makes about 32000 x 24000 = 768 million cells; at most 50 million "
         "are taken. Lower cells_per_chord, shorten the domain, or leave out uniform."),
        (BARE + "[run]\ntravel = 10000\n[grid]\ncells_per_chord = 1000\n[output]\nframe_every = 1\n",
         "case.toml:6: run.travel = 10000: takes about 5e+07 time steps; at most 2e+07 are taken. "
         "Shorten the travel, or lower grid.cells_per_chord."),
        (BOX.replace("width = 1", "width = 0.05"),
         "case.toml: grid.cells_per_chord: makes a grid of 4 x 64 cells; at least 8 each way are needed. "
         "Raise it, or enlarge the domain."),
    ],
)  # fmt: skip
def test_sentence(text, sentence):
    assert str(one_fault(text)) == sentence


def test_a_grid_beyond_three_quarters_of_the_memory_is_refused(monkeypatch):
    monkeypatch.setattr(checks_run, "machine_memory", lambda: 10e6)
    assert str(one_fault(BARE)) == (
        "case.toml: grid.cells_per_chord: makes about 232 x 175 cells, which take 0.0139 GB of memory; this "
        "machine has "
        "0.01 GB, of which three quarters may be used. "
        "Lower cells_per_chord, shorten the domain, or raise grid.stretch (now 1.04)."
    )


def test_where_the_system_does_not_tell_its_memory_the_case_is_taken(monkeypatch):
    monkeypatch.setattr(checks_run, "machine_memory", lambda: None)
    assert read(BARE).tow.reynolds == 500


def test_a_ring_of_flaps_is_refused():
    text = BARE + FLAP + 'on = "rear"\n' + REAR.replace("0.6", "0.1") + 'on = "front"\n'
    assert [fault.key for fault in faults(text)] == ["flap[0].on", "flap[1].on"]
    assert "leads in a ring and never to the plate" in str(faults(text)[0])


def test_a_flap_on_a_flap_is_measured_from_that_flaps_hinge():
    text = BARE + FLAP + REAR.replace("0.6", "0.15").replace("20 deg", "30 deg") + 'on = "front"\n'
    assert read(text).flaps[1].on == "front"
    found = one_fault(text.replace("0.15", "0.21"))
    assert found.problem == 'lies beyond the flap "front", whose length is 0.2 chords.'


def test_flaps_may_share_a_hinge_on_two_sides_but_not_on_one():
    other = FLAP.replace("front", "under")
    assert len(read(BARE + FLAP + other + 'side = "lower"\n').flaps) == 2
    assert "touches" in one_fault(BARE + FLAP + other.replace("20 deg", "40 deg")).problem


def test_a_flap_may_prolong_the_plate_at_its_trailing_edge():
    tail = FLAP.replace("0.12", "1.0").replace("20 deg", "0 deg")
    assert read(BARE + tail).flaps[0].opening == 0.0


def test_a_flap_through_a_folded_neighbour_on_the_other_piece():
    folded = REAR.replace("0.6", "0.2").replace("0.2\nopening", "0.3\nopening").replace("20 deg", "175 deg")
    text = BARE + FLAP + folded + 'on = "front"\n'
    assert one_fault(text).problem == 'flap "rear" crosses or touches the plate.'


def test_faults_of_values_and_across_keys_are_told_together():
    text = PLATE.replace('"200 mm"', "200") + FLAP.replace("20 deg", "0 deg") + "[output]\nframe_every = 99\n"
    assert [fault.key for fault in faults(text)] == ["plate.span", "output.frame_every"]
    text = BARE + FLAP.replace("20 deg", "0 deg") + "[output]\nframe_every = 99\n[run]\ncourant = 1\n"
    assert [fault.key for fault in faults(text)] == ["flap[0].opening", "output.frame_every", "run.courant"]


def test_a_driven_flap_must_stay_on_its_side_all_the_time():
    driven = FLAP.replace(
        '"20 deg"', '{kind = "oscillation", mean = "10 deg", amplitude = "15 deg", reduced_frequency = 1}'
    )
    assert "through its own plate" in one_fault(BARE + driven + 'mount = "driven"\n').problem


def test_heave_into_the_wall_is_refused():
    text = BARE + "[tank]\nwall_above = 2\n[motion]\nheave = {kind = 'ramp', to = 1.8}\n"
    assert one_fault(text).key == "tank.wall_above"


def test_verify_serves_cases_changed_in_python():
    case = read(BARE)
    assert verify(case) is case
    changed = replace(case, output=replace(case.output, frame_every=math.pi * 10))
    assert [found.place for found in problems(changed)] == [("output", "frame_every")]
    with pytest.raises(CaseError, match="frame_every: is longer than the whole run"):
        verify(changed)
