"""CSV matrices: the numbers written are the numbers read, whatever the dialect."""

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cladwatt.survey.csv_format import decode_text, parse_csv_matrix
from cladwatt.survey.decoded import Refusal

ENCODINGS = {
    "utf-8": "UTF-8",
    "utf-8-sig": "UTF-8 with BOM",
    "utf-16": "UTF-16",
    "utf-16-le": "UTF-16-LE",
    "utf-16-be": "UTF-16-BE",
    "latin-1": "Latin-1",
}
DIALECTS = [
    (separator, decimal)
    for separator, decimal in itertools.product(";\t,", ".,")
    if (separator, decimal) != (",", ",")
]


def matrix(rows: int = 12, columns: int = 16) -> np.ndarray:
    """Return warm-pipe values with two decimals, as an export rounds them."""
    noise = np.random.default_rng(5).normal(0, 0.3, (rows, columns))
    values = 21.0 + noise
    values[rows // 3 : rows // 2] += 38.0
    return np.round(values, 2)


def csv_text(
    values: np.ndarray,
    *,
    separator: str = ";",
    decimal: str = ".",
    header: str = "",
    trailing: bool = False,
    end: str = "\n",
    form: str = "{:.2f}",
) -> str:
    end_of_row = separator if trailing else ""
    rows = [
        separator.join(form.format(value).replace(".", decimal) for value in row) + end_of_row
        for row in values
    ]
    return header.replace("\n", end) + end.join(rows) + end


def read(text: str) -> np.ndarray:
    return parse_csv_matrix(text).values


def refusal_of(text: str) -> Refusal:
    with pytest.raises(Refusal) as caught:
        parse_csv_matrix(text)
    return caught.value


@pytest.mark.parametrize(("separator", "decimal"), DIALECTS)
@pytest.mark.parametrize("trailing", [False, True])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_every_dialect_gives_the_written_numbers(separator, decimal, trailing, end):
    values = matrix()
    text = csv_text(values, separator=separator, decimal=decimal, trailing=trailing, end=end)
    np.testing.assert_array_equal(read(text), values)


@pytest.mark.parametrize("encoding", ENCODINGS)
def test_every_encoding(encoding):
    values = matrix()
    text = csv_text(values, decimal=",", header="Messung Süd\nTemperatur [°C]\n")
    decoded_text, name = decode_text(text.encode(encoding))
    decoded = parse_csv_matrix(decoded_text, encoding=name)
    assert name == ENCODINGS[encoding]
    assert decoded.unit == "C"
    assert decoded.details["header_lines"] == "2"
    np.testing.assert_array_equal(decoded.values, values)


def test_utf16_with_an_odd_number_of_bytes_is_refused():
    with pytest.raises(Refusal, match="breaks off or is not UTF-16"):
        decode_text(csv_text(matrix()).encode("utf-16")[:-1])


def test_binary_is_refused():
    with pytest.raises(Refusal, match="neither TIFF nor text"):
        decode_text(b"\x01\x02\x03\x00\x05\x06\x07\x08" * 50)


@pytest.mark.parametrize(
    "header",
    [
        "one line of words\n",
        "Frame;7\nEmissivity;0,95\nAir;20,0 °C\n\nDate;2026-03-02\n",
        "16;12\n",
        "\n\n",
        "a;b;c;d;e;f;g;h;i;j;k;l;m;n;o;p\n",
        "x\n" * 60,
    ],
)
def test_any_header_is_passed_over(header):
    values = matrix()
    np.testing.assert_array_equal(read(csv_text(values, header=header, decimal=",")), values)


def test_header_lines_filled_up_by_a_spreadsheet():
    fill = ";" * 14
    header = f"Frame;7{fill}\nEmissivity;0,95{fill}\n20,5;{fill}\n;{fill}\nunit;K{fill}\n;{fill}\n"
    decoded = parse_csv_matrix(csv_text(matrix(), header=header, decimal=","))
    np.testing.assert_array_equal(decoded.values, matrix())
    assert decoded.unit == "K"


@pytest.mark.parametrize("header", ["", "Temperature [K]\n"])
def test_a_dead_first_row_is_no_header(header):
    lines = csv_text(matrix()).splitlines()
    lines[0] = ";" * 15
    values = read(header + "\n".join(lines))
    assert values.shape == matrix().shape
    assert np.isnan(values[0]).all()


@pytest.mark.parametrize("corner", ["", "y\\x", "Temperature [K]"])
@pytest.mark.parametrize("first", [0, 1])
@pytest.mark.parametrize("trailing", ["", ";"])
def test_row_and_column_numbers_are_dropped(corner, first, trailing):
    values = matrix()
    rows, columns = values.shape
    lines = [corner + ";" + ";".join(str(first + i) for i in range(columns)) + trailing]
    for number, row in enumerate(values, first):
        lines.append(f"{number};" + ";".join(f"{value:.2f}" for value in row) + trailing)
    decoded = parse_csv_matrix("\n".join(lines))
    np.testing.assert_array_equal(decoded.values, values)
    assert "frame.row_numbers_dropped" in [remark.key for remark in decoded.remarks]
    assert decoded.unit == ("K" if "K" in corner else None)
    assert decoded.values.shape == (rows, columns)


def test_column_numbers_without_a_corner_are_dropped():
    values = matrix()
    text = ",".join(map(str, range(16))) + "\n" + csv_text(values, separator=",")
    decoded = parse_csv_matrix(text)
    np.testing.assert_array_equal(decoded.values, values)
    assert [remark.key for remark in decoded.remarks] == ["frame.column_numbers_dropped"]


@pytest.mark.parametrize(
    "word", ["", " ", "NaN", "nan", "n/a", "NULL", "---", "inf", "-inf", "1e999"]
)
@pytest.mark.parametrize("decimal", [".", ","])
def test_dead_cells_are_nan(word, decimal):
    values = matrix()
    rows = [line.split(";") for line in csv_text(values, decimal=decimal).splitlines()]
    rows[4][7] = rows[0][0] = rows[-1][-1] = word
    got = read("\n".join(";".join(row) for row in rows))
    expected = values.copy()
    expected[4, 7] = expected[0, 0] = expected[-1, -1] = np.nan
    np.testing.assert_array_equal(got, expected)


def test_a_wholly_dead_row_keeps_its_place():
    values = matrix()
    lines = csv_text(values).splitlines()
    lines[3] = ";" * 15
    got = read("\n".join(lines))
    assert np.isnan(got[3]).all()
    np.testing.assert_array_equal(np.delete(got, 3, axis=0), np.delete(values, 3, axis=0))


def test_quoted_decimal_commas_between_commas():
    values = matrix()
    lines = [",".join(f'"{value:.2f}"'.replace(".", ",") for value in row) for row in values]
    np.testing.assert_array_equal(read("\n".join(lines)), values)


def test_typographic_minus_and_exponents():
    text = "\u22123.5;-2.25e1\n+4;.5\n"
    np.testing.assert_array_equal(read(text), [[-3.5, -22.5], [4.0, 0.5]])


@given(
    st.lists(
        st.lists(st.floats(-200, 1500, width=32), min_size=5, max_size=5), min_size=4, max_size=9
    ),
    st.sampled_from(DIALECTS),
)
def test_whatever_is_written_is_read(rows, dialect):
    separator, decimal = dialect
    values = np.array(rows)
    text = csv_text(values, separator=separator, decimal=decimal, form="{:.6f}")
    np.testing.assert_allclose(read(text), values, atol=5.1e-7, rtol=0)


@given(st.text(max_size=300))
def test_any_text_is_read_or_refused(text):
    try:
        values = read(text)
    except Refusal:
        return
    assert values.ndim == 2
    assert min(values.shape) >= 2


@given(st.binary(max_size=300))
def test_any_bytes_are_text_or_refused(data):
    try:
        text, _ = decode_text(data)
    except Refusal:
        return
    assert isinstance(text, str)


@pytest.mark.parametrize("line", [4, 8, 14])
@pytest.mark.parametrize("keep", [15, 3, 17])
def test_a_ragged_row_is_named_by_its_line(line, keep):
    lines = csv_text(matrix(), header="a\nb\n").splitlines()
    cells = lines[line - 1].split(";")
    lines[line - 1] = ";".join([*cells, "20.00"][:keep])
    refusal = refusal_of("\n".join(lines))
    assert refusal.line == line
    assert f"the row has {keep} values, the other rows have 16" in refusal.found


def test_a_ragged_first_row_is_no_header():
    lines = csv_text(matrix()).splitlines()
    lines[0] = lines[0].rsplit(";", 2)[0]
    refusal = refusal_of("\n".join(lines))
    assert (refusal.line, refusal.found) == (1, "the row has 14 values, the other rows have 16")


@pytest.mark.parametrize("digits", [1, 2, 3])
def test_decimal_commas_between_commas_are_recognised(digits):
    text = csv_text(matrix(), separator=",", decimal=",", form=f"{{:.{digits}f}}")
    refusal = refusal_of(text)
    assert "decimal commas read as separators" in refusal.found
    assert "gives 32 values" in refusal.found
    assert "semicolon or tab" in refusal.expected
    assert refusal.line == 1


def test_decimal_commas_near_zero_are_recognised_by_their_zeros():
    values = np.round(np.random.default_rng(3).uniform(0.5, 3.0, (8, 6)), 2)
    values[2, 2] = 1.05
    assert "decimal commas" in refusal_of(csv_text(values, separator=",", decimal=",")).found


def test_whole_kelvins_between_commas_are_no_decimal_commas():
    values = np.round(matrix() + 273.15)
    np.testing.assert_array_equal(read(csv_text(values, separator=",", form="{:.0f}")), values)


def test_both_decimal_signs_are_refused():
    lines = csv_text(matrix(), decimal=",").splitlines()
    lines[5] = lines[5].replace(",", ".")
    refusal = refusal_of("\n".join(lines))
    assert refusal.found == "decimal comma (line 1) and decimal point (line 6) in one file"


@pytest.mark.parametrize("word", ["abc", "2O.5", "20.5.1", "1-2", "20 5"])
def test_a_bad_cell_is_named(word):
    rows = [line.split(";") for line in csv_text(matrix(), header="unit: K\n").splitlines()]
    rows[6][3] = word
    refusal = refusal_of("\n".join(";".join(row) for row in rows))
    assert refusal.line == 7
    assert f"value 4 of the row is '{word}'" in refusal.found


@pytest.mark.parametrize("header", ["", "Temperature [K]\n"])
def test_a_bad_cell_in_the_first_row_does_not_make_it_a_header(header):
    lines = csv_text(matrix(), decimal=",").splitlines()
    lines[0] = lines[0].replace("2", "Z", 1)
    refusal = refusal_of(header + "\n".join(lines))
    assert refusal.line == 1 + header.count("\n")
    assert refusal.found.startswith("value 1 of the row is 'Z")


def test_words_below_the_matrix_are_named():
    refusal = refusal_of(csv_text(matrix()) + "end of export\n")
    assert refusal.line == 13
    assert "'end of export'" in refusal.found


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("", "the file is empty"),
        ("\n \r\n\t\n", "the file is empty"),
        ("hello\nworld\n", "no line of numbers found; the file begins 'hello'"),
        ("20.1 20.2\n20.3 20.4\n", "no separator between the numbers"),
        ("20\n21\n22\n", "no separator between the numbers"),
        ("20;21;22\n", r"found 1 row\(s\) of 3 value\(s\)"),
    ],
)
def test_what_is_no_matrix_is_refused(text, found):
    with pytest.raises(Refusal, match=found):
        parse_csv_matrix(text)


def test_a_list_of_points_is_refused():
    lines = [f"{x},{y},{20 + 0.1 * x}" for y in range(10) for x in range(12)]
    assert "x, y and value rather than a matrix" in refusal_of("\n".join(lines)).found


def test_too_many_values_are_refused_before_they_are_read(monkeypatch):
    monkeypatch.setattr("cladwatt.survey.csv_format.MAXIMUM_PIXELS", 100)
    assert "the matrix holds 192 values" in refusal_of(csv_text(matrix())).found


@pytest.mark.parametrize(
    ("text", "found"),
    [
        (";" * 20000 + "\n" + ";" * 20000, "the rows hold 20001 values"),
        ("1;2\n" * 20000, "the file holds 20000 lines"),
    ],
)
def test_sides_no_camera_has_are_refused(text, found):
    assert refusal_of(text).found == found
