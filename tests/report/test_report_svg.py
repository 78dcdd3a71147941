import base64
from xml.etree import ElementTree

import cv2
import numpy as np
import pytest

from cladwatt.report.colours import diverging_palette
from cladwatt.report.svg import (
    Axis,
    Drawing,
    clip_text,
    isolated,
    nice_ticks,
    plain,
    png_data_uri,
    undirected,
)


@pytest.mark.parametrize(
    ("low", "high", "target", "ticks"),
    [
        (0, 8, 8, [0, 1, 2, 3, 4, 5, 6, 7, 8]),
        (0, 300, 4, [0, 100, 200, 300]),
        (-0.3, 0.3, 3, [-0.2, 0, 0.2]),
        (0.12, 0.19, 4, [0.12, 0.14, 0.16, 0.18]),
        (3, 1e6, 5, [200000, 400000, 600000, 800000, 1000000]),
    ],
)
def test_ticks_are_nice(low, high, target, ticks):
    assert nice_ticks(low, high, target) == pytest.approx(ticks)


def test_axis_maps_and_holds_its_ends():
    axis = Axis(0.0, 10.0, 100.0, 0.0)
    assert axis(2.5) == 75.0
    assert axis(99.0) == 0.0
    np.testing.assert_array_equal(axis.places(np.array([0.0, 5.0, np.nan])), [100, 50, np.nan])


def test_png_reads_back_with_the_palette_colours():
    index = np.arange(256, dtype=np.uint8).reshape(8, 32)
    uri = png_data_uri(index, diverging_palette())
    data = np.frombuffer(base64.b64decode(uri.split(",", 1)[1]), dtype=np.uint8)
    picture = cv2.imdecode(data, cv2.IMREAD_UNCHANGED)
    assert picture.shape == (8, 32, 4)
    np.testing.assert_array_equal(picture.reshape(-1, 4)[1:, 2::-1], diverging_palette()[1:])
    assert picture[0, 0, 3] == 0
    assert picture.reshape(-1, 4)[1:, 3].min() == 255


def test_text_and_attributes_are_escaped_and_stay_xml():
    drawing = Drawing(10, 10, "p", "a < b & \x00\x1b\ud800", 'quote " here')
    drawing.text(1, 2, "</text><script>", fill='"/><g>')
    root = ElementTree.fromstring(drawing.render())
    text = root.find("{http://www.w3.org/2000/svg}text")
    assert text.text == "</text><script>"
    assert text.get("fill") == '"/><g>'
    assert root.find("{http://www.w3.org/2000/svg}title").text == "a < b & "


def test_plain_text_helpers():
    assert plain("a\nb\tc\x07") == "a b c"
    assert clip_text("W" * 300, 10) == "W" * 9 + "…"
    assert isolated("NS-101") == "NS-101"
    assert isolated("אב") == "\u2068אב\u2069"
    assert undirected("a\u202eb") == "ab"
