"""The results as data frames: the same columns and figures as the CSV files."""

import dataclasses

import numpy as np
import pandas as pd
import pytest

import cladwatt

TABLES = {
    "regions": cladwatt.regions_table,
    "stretches": cladwatt.stretches_table,
    "stations": cladwatt.stations_table,
    "components": cladwatt.components_table,
}


@pytest.fixture
def assessment(invented):
    return invented.assessment()


@pytest.mark.parametrize("name", TABLES)
def test_frames_hold_what_the_csv_files_hold(assessment, tmp_path, name):
    folder = cladwatt.write_results(assessment, tmp_path / "results")
    written = pd.read_csv(folder / f"{name}.csv", keep_default_na=False, na_values=[""])
    frame = TABLES[name](assessment)
    assert list(frame.columns) == list(written.columns)
    assert len(frame) == len(written) > 0
    for column in frame.columns:
        if pd.api.types.is_float_dtype(frame[column]):
            figures = frame[column].where(np.isfinite(frame[column]))
            # files carry six significant digits
            np.testing.assert_allclose(figures, written[column].astype(float), rtol=5.1e-6)


@pytest.mark.parametrize("name", TABLES)
def test_figures_are_numbers_even_where_none_is_known(assessment, name):
    frame = TABLES[name](assessment)
    units = ("_W", "_W_per_m", "_m", "_C", "_m_K_per_W", "_px")
    figures = [column for column in frame.columns if column.endswith(units)]
    assert figures
    for column in figures:
        assert pd.api.types.is_float_dtype(frame[column]), column


@pytest.mark.parametrize("name", TABLES)
def test_an_empty_assessment_keeps_its_columns(assessment, name):
    empty = dataclasses.replace(assessment, frames=())
    frame = TABLES[name](empty)
    assert len(frame) == 0
    assert list(frame.columns) == list(TABLES[name](assessment).columns)


def test_lines_carry_their_totals(assessment):
    frame = cladwatt.lines_table(assessment)
    assert list(frame["tag"]) == [line.tag for line in assessment.lines]
    for row, line in zip(frame.itertuples(), assessment.lines, strict=True):
        assert row.total_loss_W == line.total_loss.median
        assert row.length_high_m == line.length.high
        known = line.excess is not None
        assert row.excess_low_W == line.excess.low if known else np.isnan(row.excess_low_W)


def test_left_out_says_why_in_words(assessment):
    frame = cladwatt.left_out_table(assessment)
    assert len(frame) > 0
    assert (frame["reason"].str.len() > 10).all()
    assert not frame["reason"].str.match(r"^[a-z_]+\.[a-z_]+").any()


def test_assumptions_name_their_sources(assessment):
    frame = cladwatt.assumptions_table(assessment)
    assert len(frame) == len(assessment.assumptions) > 0
    assert (frame["source"] != "").all()
