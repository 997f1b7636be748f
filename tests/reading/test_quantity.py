"""A quantity is a number with its unit; every other spelling is refused, and the right one named."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.reading.quantity import EXAMPLES, UNITS, Dimension, QuantityError, read_number, read_size
from checker.reading.schema import load_schema

NUMBERS = [dimension for dimension in Dimension if dimension is not Dimension.SIZE]


def refused(text: str, dimension: Dimension) -> str:
    """Return the sentence with which a text is refused."""
    with pytest.raises(QuantityError) as error:
        read_size(text) if dimension is Dimension.SIZE else read_number(text, dimension)
    return str(error.value)


def attempt(text: str, dimension: Dimension) -> str:
    """Return the sentence with which a text is refused, or nothing where it is read."""
    try:
        read_size(text) if dimension is Dimension.SIZE else read_number(text, dimension)
    except QuantityError as error:
        return str(error)
    return ""


# --- what is read


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("4.2 m", Dimension.LENGTH, 4.2),
        ("4.2m", Dimension.LENGTH, 4.2),
        ("35 cm", Dimension.LENGTH, 0.35),
        ("350 mm", Dimension.LENGTH, 0.35),
        ("10 ft", Dimension.LENGTH, 3.048),  # 10 * 0.3048 exactly
        ("7 in", Dimension.LENGTH, 0.1778),  # 7 * 0.0254 exactly
        ("0 m", Dimension.LENGTH, 0.0),
        ("7.5 A", Dimension.CURRENT, 7.5),
        ("20 mA", Dimension.CURRENT, 0.02),
        ("10 kA", Dimension.CURRENT, 10_000.0),
        ("12 V", Dimension.VOLTAGE, 12.0),
        ("50 mV", Dimension.VOLTAGE, 0.05),
        ("60 W", Dimension.POWER, 60.0),
        ("2 kW", Dimension.POWER, 2000.0),
        ("220 Ah", Dimension.CAPACITY, 220.0),
        ("2 ohm", Dimension.RESISTANCE, 2.0),
        ("0.1 mohm", Dimension.RESISTANCE, 0.0001),
        ("105 C", Dimension.TEMPERATURE, 105.0),
        ("-40 C", Dimension.TEMPERATURE, -40.0),
        ("10 s", Dimension.TIME, 10.0),
        ("999999999.999999999 s", Dimension.TIME, 999999999.999999999),
    ],
)
def test_every_unit_is_read_into_si(text: str, dimension: Dimension, value: float) -> None:
    assert read_number(text, dimension) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "inches"),
    [
        ("13 ft 6 in", 162),
        ("13ft 6in", 162),
        ("0 ft 6 in", 6),
        ("1 ft 0 in", 12),
        ("4 ft 6.5 in", 54.5),
        ("4 ft 11.99 in", 59.99),
    ],
)
def test_feet_and_inches_are_read_as_one_length(text: str, inches: float) -> None:
    assert read_number(text, Dimension.LENGTH) == pytest.approx(inches * 0.0254, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "awg", "shown"),
    [
        ("6 AWG", "6", "6 AWG"),
        ("6AWG", "6", "6 AWG"),
        ("18 AWG", "18", "18 AWG"),
        ("36 AWG", "36", "36 AWG"),
        ("1 AWG", "1", "1 AWG"),
        ("0 AWG", "0", "1/0 AWG"),
        ("1/0 AWG", "0", "1/0 AWG"),
        ("00 AWG", "00", "2/0 AWG"),
        ("2/0 AWG", "00", "2/0 AWG"),
        ("2/0AWG", "00", "2/0 AWG"),
        ("000 AWG", "000", "3/0 AWG"),
        ("3/0 AWG", "000", "3/0 AWG"),
        ("0000 AWG", "0000", "4/0 AWG"),
        ("4/0 AWG", "0000", "4/0 AWG"),
    ],
)
def test_every_spelling_of_a_gauge_gives_the_same_size(text: str, awg: str, shown: str) -> None:
    size = read_size(text)
    assert (size.awg, size.text) == (awg, shown)


@pytest.mark.parametrize(("text", "shown"), [("16 mm2", "16 mm2"), ("0.75mm2", "0.75 mm2"), ("2.50 mm2", "2.5 mm2")])
def test_a_metric_size_is_its_stated_area(text: str, shown: str) -> None:
    size = read_size(text)
    assert (size.awg, size.text) == (None, shown)
    assert size.area_mm2 == float(shown.removesuffix(" mm2"))


def test_a_thicker_gauge_has_more_copper() -> None:
    names = ["4/0", "3/0", "2/0", "1/0", *map(str, range(1, 37))]
    areas = [read_size(f"{name} AWG").area_mm2 for name in names]
    assert areas == sorted(areas, reverse=True)


@pytest.mark.parametrize("dimension", NUMBERS)
def test_the_examples_in_messages_can_be_read(dimension: Dimension) -> None:
    for example in EXAMPLES[dimension].split(" or "):
        assert read_number(example, dimension) > 0


def test_the_sizes_in_messages_can_be_read() -> None:
    assert [read_size(text).text for text in re.split(", | or ", EXAMPLES[Dimension.SIZE])] == [
        "6 AWG", "2/0 AWG", "16 mm2",
    ]  # fmt: skip


# --- what is refused, and how


@pytest.mark.parametrize("text", ["6", "6.5", "0", "-6", "+6", "00", "1e3", "1_000", ".5"])
@pytest.mark.parametrize("dimension", list(Dimension))
def test_a_bare_number_is_told_that_it_has_no_unit(text: str, dimension: Dimension) -> None:
    word, example = dimension.value, EXAMPLES[dimension]
    assert refused(text, dimension) == f"“{text}” has no unit; a {word} carries its unit, e.g. {example}"


@pytest.mark.parametrize(
    ("text", "dimension", "unit", "right"),
    [
        ("4.2 M", Dimension.LENGTH, "M", "4.2 m"),
        ("4.2 metres", Dimension.LENGTH, "metres", "4.2 m"),
        ("4.2 meters", Dimension.LENGTH, "meters", "4.2 m"),
        ("4.2 metre", Dimension.LENGTH, "metre", "4.2 m"),
        ("13 feet", Dimension.LENGTH, "feet", "13 ft"),
        ("13 FT", Dimension.LENGTH, "FT", "13 ft"),
        ("13'", Dimension.LENGTH, "'", "13 ft"),
        ('6"', Dimension.LENGTH, '"', "6 in"),
        ("6 inches", Dimension.LENGTH, "inches", "6 in"),
        ("6 inch", Dimension.LENGTH, "inch", "6 in"),
        ("7.5 amps", Dimension.CURRENT, "amps", "7.5 A"),
        ("7.5 a", Dimension.CURRENT, "a", "7.5 A"),
        ("20 ma", Dimension.CURRENT, "ma", "20 mA"),
        ("12 volts", Dimension.VOLTAGE, "volts", "12 V"),
        ("12 v", Dimension.VOLTAGE, "v", "12 V"),
        ("105 °C", Dimension.TEMPERATURE, "°C", "105 C"),
        ("105 degC", Dimension.TEMPERATURE, "degC", "105 C"),
        ("220 AH", Dimension.CAPACITY, "AH", "220 Ah"),
        ("2 KW", Dimension.POWER, "KW", "2 kW"),
        ("0.1 mΩ", Dimension.RESISTANCE, "mΩ", "0.1 mohm"),
        ("2 Ω", Dimension.RESISTANCE, "Ω", "2 ohm"),
        ("2 \N{OHM SIGN}", Dimension.RESISTANCE, "\N{OHM SIGN}", "2 ohm"),
        ("2 ohms", Dimension.RESISTANCE, "ohms", "2 ohm"),
        ("10 sec", Dimension.TIME, "sec", "10 s"),
        ("6 awg", Dimension.SIZE, "awg", "6 AWG"),
        ("6 ga", Dimension.SIZE, "ga", "6 AWG"),
        ("6 gauge", Dimension.SIZE, "gauge", "6 AWG"),
        ("16 mm²", Dimension.SIZE, "mm²", "16 mm2"),
        ("16 mm^2", Dimension.SIZE, "mm^2", "16 mm2"),
        ("16 MM2", Dimension.SIZE, "MM2", None),
        ("16 sqmm", Dimension.SIZE, "sqmm", "16 mm2"),
    ],
)
def test_another_spelling_of_a_unit_is_refused_and_the_right_one_named(
    text: str, dimension: Dimension, unit: str, right: str | None
) -> None:
    if right is None:
        assert refused(text, dimension).startswith(f"unknown unit “{unit}”; ")
    else:
        assert refused(text, dimension) == f"unit “{unit}” is spelled {right.split()[1]} here; write {right}"
        read_size(right) if dimension is Dimension.SIZE else read_number(right, dimension)


@pytest.mark.parametrize(
    ("text", "dimension"), [("2 Mohm", Dimension.RESISTANCE), ("20 MA", Dimension.CURRENT), ("2 MV", Dimension.VOLTAGE)]
)
def test_a_capital_m_that_may_mean_a_million_is_never_taken_for_a_thousandth(text: str, dimension: Dimension) -> None:
    known = ", ".join(UNITS[dimension])
    message = f"unknown unit “{text.split()[1]}”; a {dimension.value} is written in {known}, e.g. {EXAMPLES[dimension]}"
    assert refused(text, dimension) == message


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("13'6\"", "“13'6\"” is spelled 13 ft 6 in here"),
        ("13' 6.5\"", "“13' 6.5\"” is spelled 13 ft 6.5 in here"),
        ("13 ft 12 in", "“13 ft 12 in” has 12 in or more beside the feet; write whole feet first"),
        ("1 ft 99 in", "“1 ft 99 in” has 12 in or more beside the feet; write whole feet first"),
        ("13 ft 6", "“13 ft 6” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("13.5 ft 6 in", "“13.5 ft 6 in” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("-1 ft 6 in", "“-1 ft 6 in” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("4 m 20 cm", "“4 m 20 cm” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("1/2 in", "“1/2 in” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("4 yd", "unknown unit “yd”; a length is written in m, cm, mm, ft, in, e.g. 4.2 m or 13 ft 6 in"),
        ("4.2  m", "“4.2  m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        (" 4.2 m", "“ 4.2 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("4.2 m ", "“4.2 m ” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("4.2 m\n", "“4.2 m\\u000a” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("4.2\u00a0m", "“4.2\\u00a0m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("\u0664 m", "“\u0664 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),  # an Arabic digit
        (".5 m", "“.5 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("5. m", "“5. m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("1e3 m", "“1e3 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("+4 m", "“+4 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("-4 m", "“-4 m” is below zero, which no length here can be"),
        ("9999999999 m", "“9999999999 m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("", "“” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("five m", "“five m” is not a length; write e.g. 4.2 m or 13 ft 6 in"),
        ("16 mm2", "“16 mm2” is a size, but a length is due here, e.g. 4.2 m or 13 ft 6 in"),
    ],
)
def test_a_text_that_is_no_length_is_refused_in_words(text: str, message: str) -> None:
    assert refused(text, Dimension.LENGTH) == message


SIZES = "6 AWG, 2/0 AWG or 16 mm2"


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("2/0", f"“2/0” has no unit; a size carries its unit, e.g. {SIZES}"),
        ("AWG 6", "“AWG 6” is spelled 6 AWG here"),
        ("AWG6", "“AWG6” is spelled 6 AWG here"),
        ("awg 2/0", "“awg 2/0” is spelled 2/0 AWG here"),
        ("#6", "“#6” is spelled 6 AWG here"),
        ("No. 6", "“No. 6” is spelled 6 AWG here"),
        ("06 AWG", "“06 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("00000 AWG", "“00000 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("37 AWG", "“37 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("6.0 AWG", "“6.0 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("6.5 AWG", "“6.5 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("-6 AWG", "“-6 AWG” is no wire gauge; write e.g. 6 AWG or 2/0 AWG"),
        ("5/0 AWG", f"“5/0 AWG” is not a size; write e.g. {SIZES}"),
        ("0/0 AWG", f"“0/0 AWG” is not a size; write e.g. {SIZES}"),
        ("2/0 mm2", f"“2/0 mm2” is not a size; write e.g. {SIZES}"),
        ("0 mm2", "“0 mm2” is no area of copper"),
        ("-1 mm2", "“-1 mm2” is no area of copper"),
        ("6 mm", f"“6 mm” is a length, but a size is due here, e.g. {SIZES}"),
        ("250 kcmil", f"unknown unit “kcmil”; a size is written in AWG, mm2, e.g. {SIZES}"),
        ("6 AWG\n", f"“6 AWG\\u000a” is not a size; write e.g. {SIZES}"),
    ],
)
def test_a_text_that_is_no_size_is_refused_in_words(text: str, message: str) -> None:
    assert refused(text, Dimension.SIZE) == message


@pytest.mark.parametrize(
    ("text", "dimension", "right"),
    [
        ("4,2 m", Dimension.LENGTH, "4.2 m"),
        ("0,5 A", Dimension.CURRENT, "0.5 A"),
        ("2,5 mm2", Dimension.SIZE, "2.5 mm2"),
        ("1,0000 V", Dimension.VOLTAGE, "1.0000 V"),
        ("-4,5 C", Dimension.TEMPERATURE, "-4.5 C"),
    ],
)
def test_a_decimal_comma_is_refused_and_the_point_is_written_for_the_author(
    text: str, dimension: Dimension, right: str
) -> None:
    assert refused(text, dimension) == f"“{text}” has a decimal comma; write {right}"


@pytest.mark.parametrize("text", ["1,000 m", "1,000,000 m", "1.000,5 m", "1,000.5 m", "4,200"])
def test_a_comma_that_may_part_thousands_is_not_guessed(text: str) -> None:
    message = f"“{text}” has a comma; decimals follow a point and nothing parts thousands, e.g. 4.2 m or 13 ft 6 in"
    assert refused(text, Dimension.LENGTH) == message


@pytest.mark.parametrize("dimension", NUMBERS)
def test_a_quantity_of_another_kind_is_named(dimension: Dimension) -> None:
    for other in Dimension:
        unit = next(iter(UNITS[other]))
        if unit not in UNITS[dimension]:
            message = f"“6 {unit}” is a {other.value}, but a {dimension.value} is due here, e.g. {EXAMPLES[dimension]}"
            assert refused(f"6 {unit}", dimension) == message


def test_a_refusal_quotes_strange_text_on_one_line_and_cuts_it() -> None:
    message = refused("12 \x1b[31m\n::error::x" + "y" * 10_000, Dimension.VOLTAGE)
    assert message.startswith("“12 \\u001b[31m\\u000a::error::xyyy")
    assert len(message) < 250


# --- whatever the text is


@given(st.text(max_size=30), st.sampled_from(list(Dimension)))
def test_any_text_is_a_quantity_or_refused_in_one_line(text: str, dimension: Dimension) -> None:
    assert attempt(text, dimension).isprintable()


@given(st.integers(0, 999_999_999), st.integers(0, 999), st.sampled_from(NUMBERS), st.data())
def test_a_number_with_any_of_its_units_comes_back(
    whole: int, part: int, dimension: Dimension, data: st.DataObject
) -> None:
    unit = data.draw(st.sampled_from(list(UNITS[dimension])))
    space = data.draw(st.sampled_from(["", " "]))
    value = read_number(f"{whole}.{part:03d}{space}{unit}", dimension) / UNITS[dimension][unit]
    assert value == pytest.approx(whole + part / 1000, rel=1e-12, abs=1e-12)


@given(st.integers(0, 99_999), st.integers(0, 11))
def test_feet_and_inches_and_inches_alone_are_exactly_the_same_length(feet: int, inches: int) -> None:
    apart = read_number(f"{feet} ft {inches} in", Dimension.LENGTH)
    assert apart == read_number(f"{feet * 12 + inches} in", Dimension.LENGTH)


@given(st.one_of(st.integers(0, 36).map(str), st.sampled_from(["1/0", "2/0", "3/0", "4/0", "00", "000", "0000"])))
def test_a_gauge_is_spelled_so_that_it_can_be_read_again(name: str) -> None:
    size = read_size(f"{name} AWG")
    assert read_size(size.text) == size


@given(st.integers(1, 99_999))
def test_an_area_is_spelled_so_that_it_can_be_read_again(hundredths: int) -> None:
    size = read_size(f"{hundredths / 100:.2f} mm2")
    assert read_size(size.text) == size
    assert size.area_mm2 == pytest.approx(hundredths / 100)


def near(dimension: Dimension) -> st.SearchStrategy[str]:
    """Give texts that look like quantities of one kind, right and wrong ones."""
    pieces = ["0", "00", "1", "12", "9.5", ".", "-", " ", "  ", "/0", "\n", ",", "full", "never", *UNITS[dimension]]
    return st.lists(st.sampled_from(pieces), max_size=6).map("".join)


@given(st.sampled_from(list(Dimension)), st.data())
def test_the_schema_that_an_editor_uses_takes_the_same_texts(dimension: Dimension, data: st.DataObject) -> None:
    text = data.draw(near(dimension))
    pattern = load_schema("quantity")["$defs"][dimension.value]["pattern"]
    by_schema = re.fullmatch(pattern.removeprefix("^").removesuffix("$"), text) is not None
    refusal = attempt(text, dimension)
    if not refusal:
        assert by_schema or text.startswith("-0")
    elif by_schema:
        # The schema cannot tell figures that are too long, gauges above 36, no copper, and twelve inches to the foot.
        known = ("is no wire gauge", "is no area of copper", "has 12 in or more")
        assert re.search("[0-9]{7}", text) or any(words in refusal for words in known)
