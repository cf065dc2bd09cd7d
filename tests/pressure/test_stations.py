"""From stations to joints: the rules one by one, elevations by hand, doubt that grows with distance, hostile tables. Readings are made up."""

import numpy as np
import pytest
import shapely

from screener.pressure import stations_to_joints as joints
from screener.pressure.cycles import RainflowCounter
from screener.pressure.extremes import ExtremeFit
from screener.pressure.linear_reference import chainage_on_main
from screener.pressure.log_summary import LoggerSummary
from screener.pressure.stations import Stations, read_stations
from screener.records import InputError, Ledger

DENSITY = 1000.0
LIFT = DENSITY * 9.80665  # Pa per metre
DOUBTS = joints.Doubts()


def table(*rows):
    """Stations from (logger, main, chainage, zone, elevation)."""
    logger, main, chainage, zone, elevation = zip(*rows, strict=True)
    text = [np.array(x, dtype=object) for x in (logger, main, zone)]
    blank = np.full(len(rows), np.nan)
    return Stations(text[0], text[1], text[2], np.array(chainage, float), np.array(elevation, float), blank, blank)


def summary(logger, level, swing=50e3, readings=1000):
    counter = RainflowCounter(np.arange(0, 1e6, 1e4))
    counter.feed(np.tile([level - swing, level + swing], 50))
    one = np.full(5, 1.0)
    fit = ExtremeFit(level + 2 * swing, swing / 5, 0.0, np.diag([100.0, 50.0]), 20, 1.0, "")
    return LoggerSummary(logger, readings, 0, 1, 60.0, 300.0, 0, 5.0, 1.0, level, level - swing, level + swing, level + swing, level - swing, 2 * swing, 10.0,
                         2e4, counter.result(), np.arange(5), (level + swing) * one, 2 * swing * one, level * one, one, fit, {})  # fmt: skip


MAIN = table(("a", "M", 100.0, "Z", 10.0), ("b", "M", 300.0, "Z", 30.0), ("c", "", np.nan, "Z", 0.0), ("d", "N", 0.0, "Y", 5.0))
LOGS = [summary("a", 600e3), summary("b", 300e3), summary("c", 500e3), summary("d", 400e3)]


def pressures(main, chainage, zone, elevation, stations=MAIN, logs=LOGS):
    return joints.joint_pressures(np.array(main, dtype=object), np.array(chainage, float), np.array(zone, dtype=object), np.array(elevation, float), stations, logs, DENSITY, DOUBTS)


def test_a_quarter_of_the_way_takes_a_quarter_of_the_further_station_as_heads():
    found = pressures(["M"], [150.0], ["Z"], [12.0])
    by_hand = 0.75 * (600e3 + 10 * LIFT) + 0.25 * (300e3 + 30 * LIFT) - 12 * LIFT
    assert found.level[0] == pytest.approx(by_hand) and found.assignment.rule[0] == joints.BETWEEN
    assert found.assignment.distance[0] == 50 and found.assignment.share[0] == 0.25
    assert found.annual_location[0] - found.level[0] == pytest.approx(100e3)
    assert found.daily_rise[0] == pytest.approx(50e3)


def test_a_level_line_at_rest_reads_the_same_head_everywhere():
    """Water at rest: stations at 10 and 30 m of elevation under one head; a joint at 17 m reads what hydrostatics says, wherever it is."""
    logs = [summary("a", 500e3), summary("b", 500e3 - 20 * LIFT)]
    found = pressures(["M"] * 3, [0.0, 200.0, 999.0], [""] * 3, [17.0] * 3, MAIN, logs)
    assert found.level == pytest.approx(500e3 - 7 * LIFT)


def test_beyond_the_last_station_nothing_is_extrapolated():
    found = pressures(["M", "M"], [0.0, 900.0], ["", ""], [10.0, 30.0])
    assert found.level == pytest.approx([600e3, 300e3]) and found.assignment.distance.tolist() == [100, 600]
    assert (found.assignment.rule == joints.NEAREST).all() and found.doubt[1] > found.doubt[0]


def test_at_a_station_that_station_alone_speaks():
    found = pressures(["M", "M"], [100.0, 300.0], ["", ""], [10.0, 30.0])
    assert found.level == pytest.approx([600e3, 300e3])
    assert found.assignment.second.tolist() == [-1, -1] and found.doubt == pytest.approx(DOUBTS.sensor)


def test_doubt_grows_with_distance_and_is_largest_between():
    at = np.array([100.0, 120.0, 200.0, 280.0, 300.0, 1300.0])
    doubt = pressures(["M"] * 6, at, [""] * 6, np.full(6, 10.0)).doubt
    assert doubt[0] < doubt[1] < doubt[2] and doubt[2] > doubt[3] > doubt[4] < doubt[5]
    assert doubt[1] == pytest.approx(doubt[3])
    assert doubt[5] == pytest.approx(np.hypot(DOUBTS.sensor, 1000 * DOUBTS.per_metre))


def test_a_joint_without_chainage_or_main_goes_by_zone_and_a_zone_station_goes_first():
    found = pressures(["M", "", "X"], [np.nan, np.nan, 50.0], ["Z", "Y", "Z"], [0.0, 5.0, 0.0])
    assert found.assignment.first.tolist() == [2, 3, 2] and (found.assignment.rule == joints.ZONE).all()
    assert found.level == pytest.approx([500e3, 400e3, 500e3])


def test_of_several_zone_stations_the_median_head_and_ties_go_by_name():
    three = table(("k", "", np.nan, "Z", 0.0), ("j", "", np.nan, "Z", 0.0), ("i", "", np.nan, "Z", 0.0))
    logs = [summary("k", 500e3), summary("j", 500e3), summary("i", 400e3)]
    assert pressures([""], [np.nan], ["Z"], [0.0], three, logs).assignment.first[0] == 1
    two = [summary("k", 500e3), summary("j", 450e3)]  # i has no readings; the lower of the middle two
    assert pressures([""], [np.nan], ["Z"], [0.0], three, two).assignment.first[0] == 1


def test_two_stations_at_one_place_go_by_name():
    twins = table(("z", "M", 100.0, "", 0.0), ("y", "M", 100.0, "", 0.0))
    found = pressures(["M"], [100.0], [""], [0.0], twins, [summary("z", 1e5), summary("y", 2e5)])
    assert found.level[0] == pytest.approx(2e5)


def test_stations_without_readings_are_passed_over():
    found = pressures(["M"], [150.0], [""], [10.0], MAIN, [LOGS[0], summary("b", 1.0, readings=0)])
    assert found.level[0] == pytest.approx(600e3) and found.assignment.rule[0] == joints.NEAREST


def test_unknown_elevation_is_not_corrected_and_doubted():
    found = pressures(["M", "M"], [100.0, 100.0], ["", ""], [np.nan, 10.0])
    assert found.level == pytest.approx([600e3, 600e3]) and found.elevation_known.tolist() == [False, True]
    assert found.doubt[0] == pytest.approx(np.hypot(DOUBTS.sensor, DOUBTS.unknown_elevation))


def test_every_joint_once_and_each_nan_with_a_reason():
    generator = np.random.default_rng(1)
    n = 500
    main = generator.choice(np.array(["M", "N", "Q", ""], dtype=object), n)
    zone = generator.choice(np.array(["Z", "Y", "none", ""], dtype=object), n)
    chainage = np.where(generator.random(n) < 0.2, np.nan, generator.uniform(0, 500, n))
    found = pressures(main, chainage, zone, generator.uniform(0, 50, n))
    assert len(found.level) == n
    assert np.array_equal(np.isnan(found.level), found.assignment.rule == joints.NONE)
    assert np.array_equal(np.isnan(found.level), found.assignment.reason != "")
    order = generator.permutation(n)
    again = pressures(main[order], chainage[order], zone[order], np.zeros(n))
    assert np.array_equal(again.assignment.first, found.assignment.first[order])


def test_no_stations_at_all():
    empty = Stations(*(np.empty(0, dtype=object),) * 3, *(np.empty(0),) * 4)
    found = pressures(["M"], [1.0], ["Z"], [0.0], empty, [])
    assert np.isnan(found.level[0]) and np.isnan(found.doubt[0]) and found.assignment.reason[0]


def test_one_range_for_all_cycles():
    """Fifty swings of 100 kPa: the equivalent lies in that bin; blended over stations the sum of n r^3 is blended."""
    found = pressures(["M"], [100.0], [""], [10.0])
    assert found.cycles_per_day[0] == 10.0
    days = 5.0
    counted = LOGS[0].cycles.counts.sum() / days
    assert found.cycle_range[0] ** 3 * found.cycles_per_day[0] == pytest.approx(counted * (105e3) ** 3, rel=0.01)


def test_station_table_as_people_write_it(tmp_path):
    path = tmp_path / "stations.csv"
    path.write_text("Logger ID;Main;Chainage (ft);Pressure zone;Elevation_m\nA1;M;1,000;North;12\nA1;M;2000;North;12\n;M;5;North;1\nB2;;;South;high\nC3;M;;;4\n")
    ledger = Ledger()
    found = read_stations(path, ledger)
    assert found.logger.tolist() == ["A1", "B2", "C3"] and found.chainage[0] == pytest.approx(304.8)
    assert np.isnan(found.elevation[1]) and found.zone[1] == "South"
    assert {b.code for b in ledger.findings} == {"station_twice", "station_name", "station_number", "station_place"}
    bare = tmp_path / "bare.csv"
    bare.write_text("logger,main,chainage\n7,M,10\n8,M,20\n")
    ledger = Ledger()
    assert read_stations(bare, ledger).chainage.tolist() == [10, 20] and [b.code for b in ledger.findings] == ["station_unit"]


def test_station_tables_that_cannot_be_used(tmp_path):
    for content in ("", "a,b\n1,2\n", "logger,elevation\nA,1\n"):
        path = tmp_path / "s.csv"
        path.write_text(content)
        with pytest.raises(InputError, match="station table"):
            read_stations(path, Ledger())
    with pytest.raises(InputError, match="no such station table"):
        read_stations(tmp_path / "none.csv", Ledger())
    (tmp_path / "s.xlsx").write_bytes(b"nothing")
    with pytest.raises(InputError, match="can't be read"):
        read_stations(tmp_path / "s.xlsx", Ledger())


def test_chainage_on_a_bent_main_by_hand():
    """3-4-5 triangle and a right angle: 100 m east, then north; the joint beside the second leg, 30 m up it and 4 m off."""
    lines = [shapely.LineString([(0, 0), (100, 0), (100, 200)]), shapely.MultiLineString([[(0, 50), (50, 50)], [(50, 50), (90, 80)]]), shapely.MultiLineString([[(0, 500), (1, 500)], [(5, 500), (6, 500)]])]
    names = np.array(["M", "N", "P"], dtype=object)
    place = chainage_on_main(names, lines, np.array(["M", "", "N", "", "P", "Q", "M", "M"], dtype=object), [104, 104, 70, 1e6, 0, 0, np.nan, 500], [30, 30, 65, 0, 500, 0, 0, 0], 20.0)
    assert place.chainage[:3] == pytest.approx([130, 130, 75]) and place.offset[:3] == pytest.approx([4, 4, 0])
    assert place.main.tolist() == ["M", "M", "N", "", "", "", "", ""] and np.isnan(place.chainage[3:]).all()
    assert place.reason[0] == "" and all(place.reason[3:])
    assert "separate parts" in place.reason[4] and "no line" in place.reason[5] and "coordinates" in place.reason[6] and "more than" in place.reason[7]


def test_of_mains_equally_near_the_first_by_name():
    lines = [shapely.LineString([(0, 2), (10, 2)]), shapely.LineString([(0, 0), (10, 0)])]
    place = chainage_on_main(["B", "A"], lines, np.array([""], dtype=object), [5.0], [1.0], 5.0)
    assert place.main[0] == "A" and place.chainage[0] == 5
    assert chainage_on_main([], [], np.array(["", "A"], dtype=object), [5.0, 1.0], [1.0, 1.0], 5.0).reason.tolist() == ["no main within 5 m", "its main has no line"]
