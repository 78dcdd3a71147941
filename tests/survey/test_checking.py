"""`check_survey`: each fault of a bad survey by name, all at once, never a traceback."""

import numpy as np
import pytest
import tifffile

from cladwatt.survey.checking import check_survey


def messages(folder, severity="error"):
    return [str(fault) for fault in check_survey(folder.root) if fault.severity == severity]


def found(folder, message, severity="error"):
    texts = messages(folder, severity)
    assert any(message in text for text in texts), texts


def test_a_sound_survey_has_nothing(survey_folder):
    assert check_survey(survey_folder.root) == ()


def test_a_wrong_unit(survey_folder):
    survey_folder.edit('unit = "C"', 'unit = "K"')
    found(survey_folder, "cannot be temperatures in K")
    found(survey_folder, "they look like °C")


def test_a_decimal_comma_read_as_separator(survey_folder):
    rows = "\n".join(",".join(["21,4", "22,6", "20,9"] * 4) for _ in range(12))
    survey_folder.write("frames/f01.csv", rows)
    found(survey_folder, "frames/f01.csv:1: frame 'f01': decimal commas read as separators")


def test_a_missing_frame(survey_folder):
    (survey_folder.root / "frames/f02.csv").unlink()
    found(survey_folder, "there is no file 'frames/f02.csv'")


def test_an_unknown_tag(survey_folder, drawn):
    found(survey_folder.draw(drawn(tag="XX")), "there is no line 'XX'")


def test_an_id_twice(survey_folder, drawn):
    survey_folder.draw(drawn("east", "CW-7"), frame="f02")
    found(survey_folder, "the id 'east' is used already by feature 1 of regions/f01.geojson")


def test_a_region_outside_its_frame(survey_folder, drawn):
    geometry = {"type": "LineString", "coordinates": [[5, 40], [400, 40]]}
    found(
        survey_folder.draw(drawn(geometry=geometry)),
        "regions/f01.geojson: feature 1 (id 'east'): point 2 at (400, 40) lies outside its frame; "
        "the frame is 160 x 80 pixels",
    )


def test_a_negative_thickness(survey_folder):
    survey_folder.edit("lagging_thickness_mm = 50", "lagging_thickness_mm = -50")
    found(survey_folder, "lagging_thickness_mm is -50")


def test_an_emissivity_above_one(survey_folder):
    survey_folder.edit("emissivity = 0.95", "emissivity = 1.3")
    found(survey_folder, "survey.toml:15: recording.emissivity: emissivity is 1.3")


def test_a_fluid_colder_than_the_air_on_a_hot_line(survey_folder):
    survey_folder.edit("fluid_temperature_C = 165.0", "fluid_temperature_C = 5.0")
    found(
        survey_folder,
        "survey.toml:33: line[1] (HS-101).service: service is 'hot' but the fluid "
        "at 5 °C is colder than the air of frame f01, 21 °C",
    )


def test_broken_toml(survey_folder):
    found(survey_folder.edit("[camera]", "[camera"), "survey.toml:10: not valid TOML")


def test_broken_geojson(survey_folder):
    found(
        survey_folder.write("regions/f01.geojson", '{"type": '), "regions/f01.geojson:1: not valid"
    )


def test_an_integer_tiff_without_scale(survey_folder):
    tifffile.imwrite(
        survey_folder.root / "frames/f02.tiff", np.full((80, 160), 7421, dtype=np.uint16)
    )
    survey_folder.edit('"frames/f02.csv"', '"frames/f02.tiff"')
    found(survey_folder, "frames/f02.tiff: frame 'f02': uint16 counts (7421 to 7421) without")


def test_an_empty_file(survey_folder):
    found(
        survey_folder.write("frames/f02.csv", b""), "frames/f02.csv: frame 'f02': the file is empty"
    )


@pytest.mark.parametrize("name", ["frames/f02.csv", "regions/f02.geojson", "survey.toml"])
def test_a_folder_instead_of_a_file(survey_folder, name):
    path = survey_folder.root / name
    path.unlink()
    path.mkdir()
    assert messages(survey_folder)


def test_no_folder_at_all(tmp_path):
    (fault,) = check_survey(tmp_path / "nowhere")
    assert "there is no such folder" in str(fault)


def test_a_label_image_of_the_wrong_size(survey_folder):
    labels = np.zeros((40, 40), dtype=np.uint8)
    labels[5:20, 5:20] = 1
    (survey_folder.root / "labels").mkdir()
    tifffile.imwrite(survey_folder.root / "labels/f02.tif", labels)
    survey_folder.write("labels/f02.csv", "integer,id,tag\n1,blob,CW-7\n")
    survey_folder.edit("air_temperature_C = 25.0", 'labels = "labels/f02.tif"')
    found(survey_folder, "the label image is 40 rows x 40 columns; expected 80 x 160")


def test_a_label_image_gives_regions(survey_folder):
    from cladwatt.survey.survey_file import read_survey

    labels = np.zeros((80, 160), dtype=np.uint8)
    labels[30:50, 5:150] = 1
    (survey_folder.root / "labels").mkdir()
    tifffile.imwrite(survey_folder.root / "labels/f02.tif", labels)
    survey_folder.write("labels/f02.csv", "integer,id,tag\n1,blob,CW-7\n")
    (survey_folder.root / "regions/f02.geojson").unlink()
    survey_folder.edit("air_temperature_C = 25.0", 'labels = "labels/f02.tif"')
    survey = read_survey(survey_folder.root)
    assert [(r.id, r.tag) for r in survey.regions_of("f02")] == [("blob", "CW-7")]
    assert {"labels/f02.tif", "labels/f02.csv"} <= set(survey.digests)
    assert messages(survey_folder) == []


def test_everything_wrong_is_named_in_one_go(survey_folder, drawn):
    survey_folder.edit("emissivity = 0.95", "emissivity = 1.3")
    survey_folder.edit("lagging_thickness_mm = 50", "lagging_thickness_mm = -50")
    survey_folder.edit('"frames/f02.csv"', '"frames/f03.csv"')
    survey_folder.draw(drawn(width_px=-3), drawn("b", tag="CW-7", role="pip"))
    texts = "\n".join(messages(survey_folder))
    for part in (
        "emissivity is 1.3", "lagging_thickness_mm is -50", "no file 'frames/f03.csv'",
        "width_px is -3", "role is 'pip'",
    ):  # fmt: skip
        assert part in texts


def test_no_path_of_this_machine_is_shown(survey_folder):
    survey_folder.edit("lagging_thickness_mm = 50", "lagging_thickness_mm = -50")
    survey_folder.write("frames/f02.csv", "")
    assert str(survey_folder.root) not in "\n".join(messages(survey_folder))


def test_random_damage_never_gives_a_traceback(survey_folder):
    """Bytes of survey file and regions overwritten, cut and doubled."""
    random = np.random.default_rng(5)
    names = ["survey.toml", "regions/f01.geojson"]
    whole = {name: (survey_folder.root / name).read_bytes() for name in names}
    for _ in range(150):
        for name, data in whole.items():
            bent = bytearray(data)
            for _ in range(int(random.integers(0, 4))):
                at = int(random.integers(len(bent)))
                kind = random.integers(3)
                if kind == 0:
                    bent[at] = int(random.integers(256))
                elif kind == 1:
                    del bent[at : at + int(random.integers(1, 30))]
                else:
                    bent[at:at] = bent[at : at + int(random.integers(1, 30))]
            survey_folder.write(name, bytes(bent))
        for fault in check_survey(survey_folder.root):
            assert fault.found
            assert fault.expected
