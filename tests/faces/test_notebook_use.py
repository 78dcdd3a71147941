"""The same job from Python: read, assess, tables, results written and read back."""

import cladwatt


def test_read_assess_tables_write_read(survey, tmp_path):
    read = cladwatt.read_survey(survey)
    seen = []
    assessment = cladwatt.assess(
        read,
        settings=cladwatt.Settings(seed=3, draws=100),
        progress=lambda *step: seen.append(step),
    )
    assert seen == [(1, 2, "steam"), (2, 2, "chilled")]
    regions = cladwatt.regions_table(assessment)
    assert list(regions["tag"]) == ["HS-101", "CW-7"]
    stations = cladwatt.stations_table(assessment)
    hot = stations[stations["region_id"] == "north-1"]
    assert hot["heat_loss_W_per_m"].max() > 1.5 * hot["heat_loss_W_per_m"].median()
    folder = cladwatt.write_results(
        assessment, str(tmp_path / "results"), survey_root=str(read.root),
        extra=lambda place: cladwatt.write_report(assessment, place),
    )  # fmt: skip
    assert (folder / "report.html").stat().st_size > 1000
    again = cladwatt.read_results(str(folder))
    assert again.total_loss == assessment.total_loss
    assert cladwatt.stations_table(again).equals(stations)
    assert cladwatt.regions_table(again).equals(regions)


def test_python_and_command_give_the_same_numbers(cladwatt, survey, tmp_path):
    import cladwatt as package

    cladwatt("assess", survey, "--draws", 100, "--seed", 3, "--out", tmp_path / "by_command")
    read = package.read_survey(survey)
    assessment = package.assess(read, settings=package.Settings(seed=3, draws=100))
    package.write_results(assessment, tmp_path / "by_python")
    name = "assessment.json"
    assert (tmp_path / "by_command" / name).read_bytes() == (
        tmp_path / "by_python" / name
    ).read_bytes()


def test_check_from_python_gives_faults_as_objects(survey):
    (survey / "frames" / "chilled.csv").write_bytes(b"")
    faults = [fault for fault in cladwatt.check_survey(survey) if fault.severity == "error"]
    assert [fault.frame_id for fault in faults] == ["chilled"]
