"""ISO 4406 codes as values. `14/12/≥7` and `-/18/13` are the standard's examples; `*` is common practice."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fleet.codes import (
    NOT_MEASURED,
    TOO_MANY_TO_COUNT,
    CodeError,
    IsoCode,
    ScaleNumber,
    compare_with,
    parse_iso_code,
    parse_target_code,
)


def a_scale_number() -> st.SearchStrategy[ScaleNumber]:
    numbers = st.builds(ScaleNumber, st.integers(0, 28), st.sampled_from(["", "≥"]))
    return st.one_of(numbers, st.just(ScaleNumber(28, ">")), st.just(NOT_MEASURED), st.just(TOO_MANY_TO_COUNT))


@st.composite
def a_code(draw: st.DrawFn) -> IsoCode:
    sizes = [draw(a_scale_number()) for _ in range(3)]
    measured = sorted((size for size in sizes if size.is_measured), key=lambda size: size.rank or 0)
    falling = [measured.pop() if size.is_measured else size for size in sizes]
    return IsoCode(*falling) if any(size.is_measured for size in falling) else IsoCode(*[ScaleNumber(13)] * 3)


@given(a_code())
def test_a_printed_code_reads_back_as_itself(code: IsoCode) -> None:
    assert parse_iso_code(str(code)) == code


@pytest.mark.parametrize(
    ("text", "printed"),
    [
        ("19/17/13", "19/17/13"),
        (" 19 / 17 / 13 ", "19/17/13"),
        ("-/18/13", "-/18/13"),
        ("–/18/13", "-/18/13"),
        ("18/13", "-/18/13"),
        ("14/12/≥7", "14/12/≥7"),
        ("14/12/>=7", "14/12/≥7"),
        ("14/12/>= 7", "14/12/≥7"),
        (">28/20/15", ">28/20/15"),
        ("*/19/14", "*/19/14"),
        ("18/-/13", "18/-/13"),
        ("09/07/00", "9/7/0"),
    ],
)
def test_every_way_of_writing_a_code_is_understood(text: str, printed: str) -> None:
    assert str(parse_iso_code(text)) == printed


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "code_empty"),
        ("   ", "code_empty"),
        ("-/-/-", "code_empty"),
        ("19", "code_wrong_length"),
        ("19/17/13/10", "code_wrong_length"),
        ("37/17/13", "code_number_too_high"),
        ("29/17/13", "code_number_too_high"),
        ("19/17/" + "9" * 5000, "code_number_too_high"),
        (">27/17/13", "code_number_unreadable"),
        ("19/abc/13", "code_number_unreadable"),
        ("19/17/-3", "code_number_unreadable"),
        ("19/17.5/13", "code_number_unreadable"),
        ("19//13", "code_number_unreadable"),
        ("19/<17/13", "code_number_unreadable"),
        ("13/17/19", "code_out_of_order"),
        ("13/-/19", "code_out_of_order"),
        ("28/>28/13", "code_out_of_order"),
        ("19/*/13", "code_out_of_order"),
    ],
)
def test_what_is_not_a_code_is_refused_with_a_stable_reason(text: str, code: str) -> None:
    with pytest.raises(CodeError) as refusal:
        parse_iso_code(text)
    assert refusal.value.code == code
    assert len(str(refusal.value)) < 250


def test_the_sentence_says_what_and_where_and_what_to_do() -> None:
    with pytest.raises(CodeError) as refusal:
        parse_iso_code("37/20/15")
    assert str(refusal.value) == ("Code 37 does not exist: the ISO 4406 scale ends at 28. Check the first number.")


@pytest.mark.parametrize("text", ["19/17/≥7", "*/17/13", ">28/17/13"])
def test_a_target_is_plain_numbers_only(text: str) -> None:
    with pytest.raises(CodeError) as refusal:
        parse_target_code(text)
    assert refusal.value.code == "target_not_plain"


def test_a_target_may_leave_a_size_open() -> None:
    assert str(parse_target_code("-/16/13")) == "-/16/13"


@pytest.mark.parametrize(
    ("number", "mark"), [(29, ""), (-1, ""), (None, ""), (27, ">"), (5, "-"), (5, "*"), (None, "≥")]
)
def test_an_impossible_scale_number_cannot_be_made(number: int | None, mark: str) -> None:
    with pytest.raises(CodeError):
        ScaleNumber(number, mark)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("code", "figure", "sizes", "overall"),
    [
        ("18/16/13", "18/16/13", ("met", "met", "met"), "met"),
        ("19/16/13", "18/16/13", ("not met", "met", "met"), "not met"),
        ("14/12/≥7", "15/13/8", ("met", "met", "cannot tell"), "cannot tell"),
        ("14/12/≥7", "15/13/7", ("met", "met", "cannot tell"), "cannot tell"),
        ("14/12/≥7", "15/13/6", ("met", "met", "not met"), "not met"),
        ("-/16/13", "18/16/13", ("cannot tell", "met", "met"), "cannot tell"),
        ("17/16/13", "-/16/13", ("not set", "met", "met"), "met"),
        ("-/16/13", "18/-/-", ("cannot tell", "not set", "not set"), "cannot tell"),
        ("*/16/13", "28/16/13", ("not met", "met", "met"), "not met"),
        (">28/16/13", "28/16/13", ("not met", "met", "met"), "not met"),
        ("28/16/13", "28/16/13", ("met", "met", "met"), "met"),
    ],
)
def test_a_code_is_held_against_a_figure_size_by_size(
    code: str, figure: str, sizes: tuple[str, ...], overall: str
) -> None:
    comparison = compare_with(parse_iso_code(code), parse_target_code(figure))
    assert comparison.sizes == sizes
    assert comparison.overall == overall
