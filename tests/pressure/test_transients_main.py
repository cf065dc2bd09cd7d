"""A main's file: what it may say, how faults are answered, and how the run treats what it says."""

import csv
from pathlib import Path

import numpy as np
import pytest

from screener.outputs.surge_plots import run_surge
from screener.pressure.main_profile import read_main
from screener.pressure.transient_case import make_event, make_sections, solve_main
from screener.pressure.transient_grid import make_grid
from screener.pressure.transient_nodes import AirValve, OrificeDemand
from screener.records import InputError

SAMPLE = Path(__file__).parents[2] / "sample_inventory" / "surge_main.toml"

GRAVITY_MAIN = """
name = "invented gravity main"
[run]
duration_s = 30
reaches = 60
history_chainage_m = [2000]
[upstream]
kind = "reservoir"
head_m = 60
[downstream]
kind = "valve"
outlet_head_m = 5
initial_flow_l_per_s = 60
opening = [[0, 1], [4, 0]]
[[profile]]
chainage_m = 0
elevation_m = 20
outside_diameter_mm = 315
dimension_ratio = 11
modulus_gpa = 1.03
poisson = 0.45
restraint = "anchored"
friction_factor = 0.017
rating_kpa = 1379
[[profile]]
chainage_m = 1200
elevation_m = 9
inside_diameter_mm = 254
wall_mm = 9
modulus_gpa = 165
poisson = 0.28
rating_kpa = 2413
[[profile]]
chainage_m = 2000
elevation_m = 5
[[joint]]
id = "A"
chainage_m = 1195
[[joint]]
id = "=B"
chainage_m = 2500
"""


def write(tmp_path, text, name="main.toml"):
    path = tmp_path / name
    path.write_text(text, encoding="utf-8")
    return path


def changed(tmp_path, old, new):
    assert old in GRAVITY_MAIN
    return write(tmp_path, GRAVITY_MAIN.replace(old, new, 1))


def test_profile_rows_carry_down_and_join_into_sections(tmp_path):
    main = read_main(write(tmp_path, GRAVITY_MAIN))
    assert main.pipe.inside_diameter == pytest.approx([0.315 * 9 / 11, 0.254])
    assert main.pipe.wall == pytest.approx([0.315 / 11, 0.009])
    assert main.pipe.friction_factor == pytest.approx([0.017, 0.017])
    sections = make_sections(main, 1.0)
    assert sections.start.tolist() == [0, 1200] and sections.length.tolist() == [1200, 800]
    assert 310 < sections.wave_speed[0] < 345 and 1150 < sections.wave_speed[1] < 1260
    stiffer = make_sections(main, 1.38)
    assert stiffer.wave_speed[0] > 1.15 * sections.wave_speed[0] and stiffer.wave_speed[1] == sections.wave_speed[1]


def test_wall_alone_may_change(tmp_path):
    text = GRAVITY_MAIN.replace("inside_diameter_mm = 254\nwall_mm = 9\nmodulus_gpa = 165\npoisson = 0.28", "dimension_ratio = 17")
    main = read_main(write(tmp_path, text))
    assert main.pipe.inside_diameter == pytest.approx([0.315 * 9 / 11, 0.315 * 15 / 17])


def test_us_units_give_the_same_run(tmp_path):
    """The same main in feet, inches, psi and US gallons: everything must come out the same (a rescaling check)."""
    metric = solve_main(read_main(write(tmp_path, GRAVITY_MAIN)))
    text = GRAVITY_MAIN
    for old, key, value in (
        ("head_m = 60", "head_ft", 60 / 0.3048), ("outlet_head_m = 5", "outlet_head_ft", 5 / 0.3048),
        ("initial_flow_l_per_s = 60", "initial_flow_gpm", 0.06 / (231 * 0.0254**3 / 60)), ("outside_diameter_mm = 315", "outside_diameter_in", 315 / 25.4),
        ("modulus_gpa = 1.03", "modulus_psi", 1.03e9 / 6894.757293168), ("chainage_m = 1200", "chainage_ft", 1200 / 0.3048),
        ("elevation_m = 9", "elevation_ft", 9 / 0.3048), ("rating_kpa = 2413", "rating_psi", 2413e3 / 6894.757293168),
    ):  # fmt: skip
        assert old in text
        text = text.replace(old, f"{key} = {value!r}", 1)
    us = solve_main(read_main(write(tmp_path, text, "us.toml")))
    assert us.cases[0].result.maximum_head == pytest.approx(metric.cases[0].result.maximum_head, rel=1e-8)
    assert us.joint_maximum[0] == pytest.approx(metric.joint_maximum[0], rel=1e-8)


def test_profile_and_joints_from_tables_beside(tmp_path):
    whole = solve_main(read_main(write(tmp_path, GRAVITY_MAIN)))
    head = GRAVITY_MAIN[: GRAVITY_MAIN.index("[[profile]]")]
    write(tmp_path, "chainage_m,elevation_m,outside_diameter_mm,dimension_ratio,modulus_gpa,poisson,restraint,friction_factor,inside_diameter_mm,wall_mm\n"
          "0,20,315,11,1.03,0.45,anchored,0.017,,\n1200,9,,,165,0.28,,,254,9\n2000,5,,,,,,,,\n", "profile.csv")  # fmt: skip
    write(tmp_path, "id,chainage_m,note\nA,1195,any other column\n", "joints.csv")
    apart = solve_main(read_main(write(tmp_path, head + '[profile]\nfile = "profile.csv"\n[joint]\nfile = "joints.csv"\n', "apart.toml")))
    assert apart.joint_maximum[0] == pytest.approx(whole.joint_maximum[0], rel=1e-12)


@pytest.mark.parametrize(("old", "new", "said"), [
    ("head_m = 60", "head_m = nan", "not a number"),
    ("head_m = 60", 'head_m = "high"', "not a number"),
    ("head_m = 60", "hed_m = 60", "head_m is missing"),
    ("head_m = 60", "head_m = 60\nhead_ft = 3", "keep one"),
    ("duration_s = 30", "duration_s = -1", "outside"),
    ("duration_s = 30", "", "duration_s is missing"),
    ("reaches = 60", "reaches = 60\nreeches = 3", "did you mean reaches"),
    ("chainage_m = 1200", "chainage_m = 2200", "does not lie beyond"),
    ("chainage_m = 1200", "chainage_m = true", "not a number"),
    ("dimension_ratio = 11", "dimension_ratio = 2", "outside"),
    ("dimension_ratio = 11", "dimension_ratio = 11\nwall_mm = 20", "do not agree"),
    ("dimension_ratio = 11\n", "", "the bore is not known"),
    ("modulus_gpa = 1.03\n", "", "wave speed needs"),
    ("friction_factor = 0.017\n", "", "friction_factor nor roughness"),
    ('restraint = "anchored"', 'restraint = "glued"', "expected one of anchored"),
    ('kind = "valve"', 'kind = "tap"', "expected one of reservoir, valve"),
    ("opening = [[0, 1], [4, 0]]", "opening = [[4, 1], [0, 0]]", "go back"),
    ("opening = [[0, 1], [4, 0]]", "opening = [[0, 1], [4, 1.5]]", "outside 0 to 1"),
    ("opening = [[0, 1], [4, 0]]", "opening = 3", "pairs"),
    ("initial_flow_l_per_s = 60", "initial_flow_l_per_s = 60\ndischarge_area_m2 = 0.01", "give either"),
    ("initial_flow_l_per_s = 60", "initial_flow_l_per_s = 6000", "no steady state"),
    ("history_chainage_m = [2000]", "history_chainage_m = [9000]", "beyond the ends"),
    ("history_chainage_m = [2000]", "modulus_multipliers = []", "modulus_multipliers"),
    ("[upstream]", "[upstraem]", "no [upstream]"),
    ('[[joint]]\nid = "A"', "[[joint]]", "id is missing"),
    ("[run]", "[[demand]]\nchainage_m = 5000\nflow_l_per_s = 1\n[run]", "between the ends"),
    ("[run]", "[run", "not a TOML file"),
])  # fmt: skip
def test_faults_are_answered_in_one_sentence(tmp_path, old, new, said):
    path = changed(tmp_path, old, new)
    with pytest.raises(InputError) as caught:
        solve_main(read_main(path))
    assert said in str(caught.value) and "\n" not in str(caught.value).strip()


def test_files_that_are_no_mains(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        read_main(tmp_path / "absent.toml")
    (tmp_path / "binary.toml").write_bytes(bytes(range(256)))
    with pytest.raises(InputError, match="can't be read"):
        read_main(tmp_path / "binary.toml")
    with pytest.raises(InputError, match="at least two points"):
        read_main(write(tmp_path, "name = 'x'"))
    with pytest.raises(InputError, match="plain name"):
        read_main(write(tmp_path, '[profile]\nfile = "../elsewhere.csv"'))
    with pytest.raises(InputError, match="can't be read"):
        read_main(tmp_path)


def test_too_much_work_is_refused(tmp_path):
    path = changed(tmp_path, "duration_s = 30\nreaches = 60", "duration_s = 86400\nreaches = 5000")
    with pytest.raises(InputError, match="too many"):
        solve_main(read_main(path))


def test_short_spool_is_one_reach_and_leaves_the_main_alone(tmp_path):
    """A 3 m iron spool in a plastic main: said in a caution, and the plastic's wave speed hardly changes."""
    spool = "[[profile]]\nchainage_m = 1203\nelevation_m = 9\noutside_diameter_mm = 315\ndimension_ratio = 11\nmodulus_gpa = 1.03\npoisson = 0.45\n"
    text = GRAVITY_MAIN.replace("[[profile]]\nchainage_m = 2000", spool + "[[profile]]\nchainage_m = 2000", 1)
    case = solve_main(read_main(write(tmp_path, text))).cases[0]
    grid = case.result.grid
    assert grid.short.tolist() == [False, True, False] and grid.reaches[1] == 1
    assert grid.worst_change < 0.02 and len(grid.section) < 80
    assert 0 < grid.added_travel < 0.02
    assert any("shorter than half a reach" in text for text in case.cautions)


def test_wave_speed_limit_refines_the_grid_or_is_reported(tmp_path):
    """A limit that 60 reaches can't keep: more reaches are taken while that helps; where it does not, a caution says so."""
    tight = read_main(changed(tmp_path, "reaches = 60", "reaches = 60\nlargest_speed_change = 0.0005"))
    case = solve_main(tight).cases[0]
    assert len(case.result.grid.section) > 60
    over = case.result.grid.worst_change > 0.0005
    assert over == any("a wave speed was changed" in text for text in case.cautions)


def test_joint_beyond_the_main_has_no_result_and_says_so(tmp_path):
    run = run_surge(write(tmp_path, GRAVITY_MAIN), tmp_path / "out")
    assert np.isnan(run.joint_maximum[1]) and np.isfinite(run.joint_maximum[0])
    with open(tmp_path / "out" / "surge_joints.csv", newline="", encoding="utf-8") as stream:
        table = list(csv.DictReader(stream))
    assert table[1]["remark"] == "beyond the ends of the main" and table[1]["maximum_pressure_kpa"] == ""
    assert table[1]["joint_id"] == "'=B"  # no formula in a spreadsheet
    assert float(table[0]["maximum_pressure_kpa"]) == pytest.approx(run.joint_maximum[0] / 1e3, abs=0.001)
    assert all(path.exists() for path in run.files) and len(run.files) == 6
    assert not [p for p in (tmp_path / "out").iterdir() if p.name.startswith(".")]


def test_sample_main_runs_and_is_marked_as_invented(tmp_path):
    assert "invented" in SAMPLE.read_text(encoding="utf-8")
    done = []
    run = run_surge(SAMPLE, tmp_path / "out", progress=done.append)
    text = (tmp_path / "out" / "surge.txt").read_text(encoding="utf-8")
    assert not run.needs_study and "screening" in text and "torque at zero flow" in text
    assert "below atmospheric" in text
    assert len(run.cases) == 2 and run.cases[1].result.maximum_head.max() > run.cases[0].result.maximum_head.max()
    assert done and 0 < max(done) <= 1 and sorted(done) == done
    steady = run.cases[0].result.steady
    assert steady.head[0] == pytest.approx(12 + 62 - 16 * (steady.flow_in[0] / 0.12) ** 2)


def test_vapour_pressure_sends_every_joint_to_a_study(tmp_path):
    """A high point that the down-surge empties: the run says so for all joints and keeps the envelope from before the cavity."""
    text = SAMPLE.read_text(encoding="utf-8").replace("elevation_m = 22", "elevation_m = 36")
    run = run_surge(write(tmp_path, text), tmp_path / "out")
    assert run.needs_study and run.joint_needs_study.all()
    assert "needs a transient study" in (tmp_path / "out" / "surge.txt").read_text(encoding="utf-8")
    assert (run.joint_before_cavity <= run.joint_maximum + 1e-6).all()
    case = run.cases[0]
    lowest = case.result.pressure(case.result.minimum_head)
    assert lowest.min() > -101.5e3  # never below absolute zero


def test_high_point_between_nodes_is_seen(tmp_path):
    """A peak of the profile that no node hits still counts: head there is compared with vapour pressure."""
    peak = "[[profile]]\nchainage_m = 1650\nelevation_m = 6.5\n[[profile]]\nchainage_m = 1660\nelevation_m = 58\n[[profile]]\nchainage_m = 1670\nelevation_m = 6\n[[profile]]\nchainage_m = 2000"
    text = GRAVITY_MAIN.replace("[[profile]]\nchainage_m = 2000", peak, 1)
    run = solve_main(read_main(write(tmp_path, text)))
    assert run.needs_study


def test_air_valve_keeps_a_high_point_near_atmospheric(tmp_path):
    text = SAMPLE.read_text(encoding="utf-8").replace("elevation_m = 22", "elevation_m = 30")
    without = solve_main(read_main(write(tmp_path, text)))
    text = text.replace("[[joint]]", "[[air_valve]]\nchainage_m = 2600\noutlet_area_mm2 = 200\n\n[[joint]]", 1)
    with_valve = solve_main(read_main(write(tmp_path, text)))
    assert without.joint_minimum[3] < -70e3 and with_valve.joint_minimum[3] > -8e3
    assert any("air valve opened" in text for text in with_valve.cautions)
    assert all(abs(case.result.mass_error) < 1e-3 for case in with_valve.cases)


def test_air_valve_pocket_is_isothermal_when_shut():
    """No outlet: (H - z + hb) V = hb V_air in every step; the pocket never holds less than its air squeezed."""
    pocket = AirValve(5, 10.0, 0.0, 10.33)
    head = pocket.solve(2.0, 2.0 * 9.0 - 0.5, 12.0, 0.1)  # liquid head would be 8.75 m: air comes in
    assert head == 10.0 and pocket.volume == pytest.approx(pocket.air) and pocket.volume == pytest.approx(0.1 * (2.0 * 10 - 17.5))
    air = pocket.air
    for liquid in (14.0, 20.0, 35.0):
        head = pocket.solve(2.0, 2.0 * liquid, head, 0.1)
        assert (head - 10.0 + 10.33) * pocket.volume == pytest.approx(10.33 * air, rel=1e-9)
        assert 10.0 < head < liquid


def test_orifice_demand_solves_its_node():
    outlet = OrificeDemand(3, 10.0, 0.002, (np.zeros(1), np.ones(1)))
    head, flow = outlet.solve(0.01, 0.5, 0.0)
    assert 0.01 * head + flow == pytest.approx(0.5) and flow == pytest.approx(outlet.draw(head, 0.0))
    assert outlet.solve(0.01, 0.05, 0.0) == (5.0, 0.0)  # below the outlet nothing flows


def test_demands_take_their_water(tmp_path):
    extra = "[[demand]]\nchainage_m = 600\nflow_l_per_s = 5\n[[demand]]\nchainage_m = 1500\ndischarge_area_mm2 = 400\n[run]"
    main = read_main(changed(tmp_path, "[run]", extra))
    case = solve_main(main).cases[0]
    steady = case.result.steady
    taken = steady.flow_in - steady.flow_out
    (first, second) = np.flatnonzero(taken > 0)
    assert taken[first] == pytest.approx(0.005)
    assert taken[second] == pytest.approx(400e-6 * np.sqrt(2 * 9.80665 * (steady.head[second] - case.result.elevation[second])))
    assert steady.flow_out[-1] == pytest.approx(0.060) and steady.flow_in[0] == pytest.approx(0.060 + taken.sum())
    assert abs(case.result.mass_error) < 1e-4
    assert any("constant demands" in text for text in case.cautions)


def test_runs_repeat_exactly(tmp_path):
    main = read_main(write(tmp_path, GRAVITY_MAIN))
    first, second = solve_main(main), solve_main(main)
    assert (first.cases[0].result.maximum_head == second.cases[0].result.maximum_head).all()


def test_unknown_rating_stays_unknown(tmp_path):
    """Unknown never becomes zero: without a rating the tables leave the cell empty."""
    text = GRAVITY_MAIN.replace("rating_kpa = 1379\n", "").replace("rating_kpa = 2413\n", "")
    run_surge(write(tmp_path, text), tmp_path / "out")
    with open(tmp_path / "out" / "surge_envelope.csv", newline="", encoding="utf-8") as stream:
        assert {row["rating_kpa"] for row in csv.DictReader(stream)} == {""}


def test_creep_acts_on_plastic_only(tmp_path):
    creep = "[creep]\ncompliance_per_gpa = [0.1, 0.1]\nretardation_s = [0.05, 0.5]\n[run]"
    main = read_main(changed(tmp_path, "[run]", creep))
    sections = make_sections(main, 1.0)
    assert sections.creep_compliance[:, 0] == pytest.approx(1e-10) and (sections.creep_compliance[:, 1] == 0).all()
    event = make_event(main, sections, make_grid(sections, 60, 0.05, 600))
    assert event.sections is sections
    stiff = solve_main(read_main(write(tmp_path, GRAVITY_MAIN))).cases[0].result
    assert solve_main(main).cases[0].result.maximum_head[-1] < stiff.maximum_head[-1]


def test_main_without_joints_or_ratings(tmp_path):
    text = GRAVITY_MAIN[: GRAVITY_MAIN.index("[[joint]]")]
    run = run_surge(write(tmp_path, text), tmp_path / "out")
    assert run.joint_maximum.shape == (0,) and run.files[-1].read_text(encoding="utf-8").startswith("invented gravity main")


def test_pumps_far_from_their_rated_point_are_doubted(tmp_path):
    text = SAMPLE.read_text(encoding="utf-8").replace("head_m = 44", "head_m = 72")
    run = solve_main(read_main(write(tmp_path, text)))
    assert any("of their rated flow" in text for text in run.cautions)


def test_name_with_markup_is_shown_as_written(tmp_path):
    """A hostile name: no mathematics, no control characters, no crash in the picture."""
    run = run_surge(changed(tmp_path, "invented gravity main", "$\\\\frac{ <b>\\n"), tmp_path / "out")
    assert (tmp_path / "out" / "surge_envelope.png").stat().st_size > 10_000 and run.files


def test_closed_pipe_at_rest_has_a_result(tmp_path):
    text = GRAVITY_MAIN[GRAVITY_MAIN.index("[[profile]]") :].replace("friction_factor = 0.017", "roughness_mm = 0.01")
    head = "[run]\nduration_s = 5\n[upstream]\nkind = 'reservoir'\nhead_m = 60\n[downstream]\nkind = 'dead end'\n"
    case = solve_main(read_main(write(tmp_path, head + text))).cases[0]
    assert case.result.maximum_head == pytest.approx(60.0) and case.result.mass_error == pytest.approx(0.0, abs=1e-6)
