"""Reading logs: many layouts, defects found and nothing invented, the same answer whatever the pieces. All readings are made up here."""

import gzip

import numpy as np
import pandas as pd
import pytest

from screener.pressure.log_settings import LogSettings, unit_of
from screener.pressure.logs import read_logs
from screener.records import InputError, Ledger, Severity

START = pd.Timestamp("2026-03-02")


def day_and_night(days=3, step=60, seed=1):
    """Made-up readings: time, kPa."""
    seconds = np.arange(0, days * 86_400, step)
    value = 500 + 60 * np.sin(seconds * 2 * np.pi / 86_400) + np.random.default_rng(seed).normal(scale=3, size=len(seconds))
    return pd.DataFrame({"time": START + pd.to_timedelta(seconds, unit="s"), "value": np.round(value, 1)})


def write(folder, name, frame, heading="pressure (kPa)", **options):
    frame.rename(columns={"value": heading}).to_csv(folder / name, index=False, **options)
    return folder / name


def read(paths, **settings):
    ledger = Ledger()
    return {s.logger: s for s in read_logs(paths, LogSettings(**settings), ledger)}, {batch.code for batch in ledger.findings}, ledger


def same(a, b, but=()):
    for name in ("readings", "first", "last", "interval", "gaps", "covered_days", "level", "largest", "smallest", "daily_range", "cycles_per_day"):
        if name not in but:
            assert getattr(a, name) == pytest.approx(getattr(b, name), rel=1e-9), name
    assert np.array_equal(a.cycles.counts, b.cycles.counts) and np.allclose(a.day_largest, b.day_largest)


@pytest.fixture
def plain(tmp_path):
    folder = tmp_path / "plain"
    folder.mkdir()
    write(folder, "A1.csv", day_and_night())
    return read(folder)[0]["A1"]


def test_level_range_and_cycles_of_a_plain_day(plain):
    assert plain.level == pytest.approx(500e3, abs=2e3) and plain.interval == 60
    assert plain.daily_range == pytest.approx(135e3, abs=10e3)
    assert plain.covered_share == pytest.approx(1) and plain.covered_days == pytest.approx(3, abs=1e-3)
    assert 0.9 < plain.cycles_per_day < 1.5 and plain.removed == {}


def variants(folder):
    """The same three days in as many shapes."""
    frame = day_and_night()
    iso = frame.assign(time=frame["time"].dt.strftime("%Y-%m-%dT%H:%M:%SZ"))
    write(folder, "v.csv", iso)
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(time=frame["time"].dt.strftime("%d/%m/%Y %H:%M")))
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(time=frame["time"].dt.strftime("%m/%d/%Y %I:%M:%S %p")))
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(time=(frame["time"] - pd.Timestamp(0)) // pd.Timedelta("1s")))
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(time=(frame["time"] - pd.Timestamp("1899-12-30")) / pd.Timedelta("1D")))
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(time=frame["time"].dt.strftime("%Y-%m-%dT%H:%M:%S+10:00")))
    yield folder / "v.csv", {}, "shifted"
    write(folder, "v.csv", frame, sep=";", decimal=",")
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame, heading="value")
    yield folder / "v.csv", {"unit": "kPa"}, "v"
    write(folder, "v.csv", frame.assign(value=frame["value"] / 100), heading="Pressure_bar")
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.assign(value=frame["value"] + 101.325), heading="p [kPa abs]")
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.iloc[::-1])
    yield folder / "v.csv", {}, "v"
    write(folder, "v.csv", frame.sample(frac=1, random_state=1))
    yield folder / "v.csv", {}, "v"
    write(folder, "v.tsv", frame, sep="\t", encoding="utf-16")
    yield folder / "v.tsv", {}, "v"
    with gzip.open(folder / "v.csv.gz", "wt") as stream:
        frame.rename(columns={"value": "pressure (kPa)"}).to_csv(stream, index=False)
    yield folder / "v.csv.gz", {}, "v"
    body = frame.to_csv(index=False, header=False)
    (folder / "v.csv").write_text("Logger: PX 9\nUnits: kPa\n\ndate and time,reading\n" + body)
    yield folder / "v.csv", {}, "PX 9"
    (folder / "v.csv").write_text(body)
    yield folder / "v.csv", {"unit": "kPa"}, "v"
    frame.assign(date=frame["time"].dt.strftime("%d.%m.%Y"), clock=frame["time"].dt.strftime("%H:%M:%S"))[["date", "clock", "value"]].to_csv(folder / "v.csv", index=False, header=["Date", "Time", "P (kPa)"])
    yield folder / "v.csv", {}, "v"
    frame.rename(columns={"value": "pressure_kpa"}).to_parquet(folder / "v.parquet")
    yield folder / "v.parquet", {}, "v"
    frame.set_index("time").rename(columns={"value": "pressure_kpa"}).to_parquet(folder / "v.parquet")
    yield folder / "v.parquet", {}, "v"
    frame.rename(columns={"value": "pressure (kPa)"}).to_excel(folder / "v.xlsx", index=False)
    yield folder / "v.xlsx", {}, "v"
    frame.assign(logger="N-7")[["logger", "time", "value"]].to_csv(folder / "v.csv", index=False, header=["Logger ID", "Timestamp", "Pressure (kPa)"])
    yield folder / "v.csv", {}, "N-7"
    frame.assign(unit="kPa", logger=7).to_csv(folder / "v.csv", index=False)
    yield folder / "v.csv", {}, "7"
    frame.assign(battery=3.6, other="x").rename(columns={"value": "K2 (kPa)"})[["time", "K2 (kPa)", "battery"]].to_csv(folder / "v.csv", index=False)
    yield folder / "v.csv", {}, "K2"


def test_every_layout_gives_the_same_answer(tmp_path, plain):
    for number, (path, settings, logger) in enumerate(variants(tmp_path)):
        found, codes, ledger = read(path, **settings)
        shifted = logger == "shifted"
        summary = found["v" if shifted else logger]
        assert len(found) == 1 and not any(b.severity is Severity.BLOCKS for b in ledger.findings), (number, [b.problem for b in ledger.findings])
        if shifted:
            assert summary.first == plain.first - 10 * 3_600_000 and summary.level == pytest.approx(plain.level)
        else:
            same(summary, plain)
    assert number == 22


@pytest.mark.parametrize(("chunk_rows", "memory_rows"), [(400, 20_000_000), (997, 1500), (500_000, 1)])
def test_pieces_and_spilling_to_disk_change_nothing(tmp_path, chunk_rows, memory_rows):
    frame = day_and_night(days=5, step=30)
    frame.loc[700:1400, "value"] = 512.0  # stuck
    frame.loc[[50, 99, 100, 2000], "value"] = [5000.0, -999.0, 0.0, 3500.0]
    frame = pd.concat((frame.iloc[:3000], frame.iloc[2990:5000], frame.iloc[6000:][::-1], frame.iloc[5000:5500]))
    write(tmp_path, "A.csv", frame)
    write(tmp_path, "B.csv", frame.iloc[::3])
    whole, codes, _ = read(tmp_path)
    parts, codes_of_parts, _ = read(tmp_path, chunk_rows=chunk_rows, memory_rows=memory_rows)
    assert {"log_stuck", "log_spike", "log_missing_code", "log_drop_out", "log_repeated", "log_order"} <= codes == codes_of_parts
    for name in ("A", "B"):
        same(parts[name], whole[name])
        assert parts[name].removed == whole[name].removed


def test_one_file_or_many_for_a_logger_and_many_loggers_in_a_file(tmp_path):
    a, b = day_and_night(seed=1), day_and_night(seed=2)
    (tmp_path / "wide").mkdir()
    a.rename(columns={"value": "A (kPa)"}).assign(**{"B (kPa)": b["value"]}).to_csv(tmp_path / "wide" / "both.csv", index=False)
    (tmp_path / "long").mkdir()
    long = pd.concat((a.assign(station="A"), b.assign(station="B"))).sort_values("time")
    long.iloc[:4000].to_csv(tmp_path / "long" / "2.csv", index=False, header=["time", "pressure (kPa)", "station"])
    long.iloc[4000:].to_csv(tmp_path / "long" / "1.csv", index=False, header=["time", "pressure (kPa)", "station"])
    wide, parts = read(tmp_path / "wide")[0], read([tmp_path / "long" / "2.csv", tmp_path / "long"])[0]
    assert wide.keys() == parts.keys() == {"A", "B"}
    for name in wide:
        same(wide[name], parts[name])


def test_nothing_is_counted_across_a_gap(tmp_path):
    """Two halves at different levels with a gap between: the step from one to the other is no cycle."""
    frame = day_and_night(days=2)
    frame.loc[1440:, "value"] += 2000
    joined = read(write(tmp_path, "whole.csv", frame))[0]["whole"]
    gapped = read(write(tmp_path, "gap.csv", frame.drop(index=range(1430, 1450))))[0]["gap"]
    assert joined.cycles.largest_range > 2e6 and gapped.cycles.largest_range < 2e5
    assert gapped.gaps == 1 and gapped.covered_days == pytest.approx(joined.covered_days - 21 / 1440, abs=1e-6)


def test_a_burst_of_quick_readings_does_not_make_gaps(tmp_path):
    frame = day_and_night(days=4, step=120)
    quick = pd.DataFrame({"time": START + pd.to_timedelta(np.arange(3600) + 100_000, unit="s"), "value": 500.0 + np.arange(3600) % 7})
    found = read(write(tmp_path, "a.csv", pd.concat((frame, quick))), unit="kPa")[0]["a"]
    assert found.interval == 120 and found.gaps == 0


def test_a_surge_is_not_taken_for_a_spike_nor_a_quiet_night_for_a_stuck_sensor(tmp_path):
    frame = day_and_night(step=900)
    frame.loc[100, "value"] = 1400.0  # 900 kPa above: a PE main can do that
    frame.loc[120:160, "value"] = 480.0  # ten hours, 41 readings
    found, codes, _ = read(write(tmp_path, "a.csv", frame))
    assert found["a"].largest == 1400e3 and found["a"].removed == {}


def test_conflicting_values_take_the_larger_and_say_so(tmp_path):
    frame = pd.concat((day_and_night(), pd.DataFrame({"time": [START + pd.Timedelta("90min")], "value": [900.0]})))
    found, codes, _ = read(write(tmp_path, "a.csv", frame))
    assert found["a"].removed == {"conflicting": 1} and found["a"].largest == 900e3 and "log_conflicting" in codes


def test_drift_is_said_and_kept(tmp_path):
    frame = day_and_night(days=20, step=600)
    frame["value"] += np.linspace(0, 80, len(frame))
    found, codes, ledger = read(write(tmp_path, "a.csv", frame))
    assert "log_drift" in codes and found["a"].removed == {}
    assert any("+7" in b.problem or "+8" in b.problem for b in ledger.findings if b.code == "log_drift")
    assert "log_drift" not in read(write(tmp_path, "b.csv", day_and_night(days=20, step=600)))[1]


def test_clock_changes_with_a_time_zone(tmp_path):
    local = pd.date_range("2026-10-31", "2026-11-03", freq="60s", inclusive="left")
    frame = pd.DataFrame({"time": local, "value": 500.0 + np.arange(len(local)) % 50})
    found, codes, ledger = read(write(tmp_path, "a.csv", frame), time_zone="America/Denver")
    assert "log_clock_change" in codes and found["a"].readings == len(local) - 60
    assert found["a"].last - found["a"].first == (3 * 86_400 + 3600 - 60) * 1000  # the day of the change has 25 hours


def test_day_and_month_that_cannot_be_told_apart_are_doubted(tmp_path):
    frame = pd.DataFrame({"time": [f"03/03/2026 {h:02d}:00" for h in range(24)], "value": np.arange(24.0) + 100})
    assert "log_times" not in read(write(tmp_path, "a.csv", frame), day_first=True)[1]
    ambiguous = pd.DataFrame({"time": [f"03/04/2026 {h:02d}:00" for h in range(24)], "value": np.arange(24.0) + 100})
    found, codes, _ = read(write(tmp_path, "b.csv", ambiguous))
    assert "log_times" in codes and pd.Timestamp(found["b"].first, unit="ms") == pd.Timestamp("2026-03-04")
    assert pd.Timestamp(read(tmp_path / "b.csv", day_first=True)[0]["b"].first, unit="ms") == pd.Timestamp("2026-04-03")


def test_hostile_files_are_findings(tmp_path):
    write(tmp_path, "good.csv", day_and_night())
    (tmp_path / "empty.csv").write_text("")
    (tmp_path / "words.csv").write_text("dear all,\nplease find attached\n" * 50)
    (tmp_path / "binary.csv").write_bytes(bytes(range(256)) * 300)
    (tmp_path / "broken.parquet").write_bytes(b"PAR1 not really")
    (tmp_path / "broken.xlsx").write_bytes(b"PK nothing")
    write(tmp_path, "nounit.csv", day_and_night(), heading="pressure")
    (tmp_path / "heading_only.csv").write_text("time,pressure (kPa)\n")
    (tmp_path / "bad_cells.csv").write_text("time,pressure (kPa)\n2026-03-02 00:00,500\nyesterday,510\n2026-03-02 00:02,n/k\n2026-03-02 00:03,505,9,9,9,9,9,9,9\n2026-03-02 00:04,inf\n2026-03-02 00:05,1e308\n2026-03-02 00:06,505,7\n")
    found, codes, ledger = read(tmp_path)
    assert {"good", "bad_cells"} <= found.keys() and found["bad_cells"].readings == 2
    assert found["bad_cells"].removed["unreadable"] == 2 and found["bad_cells"].removed["impossible"] >= 1
    left_out = {b.column for b in ledger.findings if b.code == "log_file"}
    assert left_out == {"empty.csv", "words.csv", "binary.csv", "broken.parquet", "broken.xlsx", "nounit.csv"}
    assert "log_lines" in codes
    for batch in ledger.findings:
        assert batch.problem and batch.action and "\n" not in batch.problem


def test_nothing_usable_is_one_clear_sentence(tmp_path):
    with pytest.raises(InputError, match="no such file or folder"):
        read(tmp_path / "nowhere")
    with pytest.raises(InputError, match="no pressure logs found"):
        read(tmp_path)
    write(tmp_path, "a.csv", day_and_night(), heading="pressure")
    with pytest.raises(InputError, match="names no pressure unit"):
        read(tmp_path)
    for wrong in ({"unit": "furlong"}, {"time_zone": "Mars/Base"}, {"chunk_rows": 0}):
        with pytest.raises(InputError):
            LogSettings(**wrong)


def test_units_as_people_write_them():
    assert unit_of("psi") == (pytest.approx(6894.757), False) and unit_of("PSIG") == unit_of("psi (g)") == unit_of("psi")
    assert unit_of("bar(a)")[1] and unit_of("psia")[1] and unit_of("kPa abs")[1] and not unit_of("bar g")[1]
    assert unit_of("m head") == unit_of("mH2O") == (pytest.approx(9806.65), False)
    assert unit_of("V") is None and unit_of("") is None and unit_of("mg") is None


def test_a_short_record_has_no_yearly_maximum_and_says_why(plain):
    assert plain.annual_maximum.reason
    assert plain.annual_maximum.count == 3
