"""What people paste into the result form: a code, two or three counts, or a whole line of a mail. Pure; never raises.

The unit of counts is always explicit: counts without one come back with ``basis`` None, and the form has to ask.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal
from itertools import combinations, pairwise
from typing import Final

from fleet.codes import CodeError, IsoCode, parse_iso_code
from samples.coding.iso4406 import Basis, code_from_counts, per_ml_from
from samples.intake.numbers import DecimalMark, read_number
from samples.problems import Problem

Counts = tuple[Decimal | None, Decimal | None, Decimal | None]

_LONGEST: Final = 2_000
_TIDY: Final = str.maketrans(
    {
        **dict.fromkeys("\u00a0\u2007\u2009\u202f", " "),
        **dict.fromkeys("–—−", "-"),
        **dict.fromkeys("∕⁄／", "/"),
        **dict.fromkeys("⩾≧", "≥"),
        "μ": "µ",
        "³": "3",
    }
)
_VOLUME: Final = r"(?:ml|millilit(?:re|er)s?|cm3|cc)\b"
_PER: Final = r"(?:/|\bper\b|\bin\b)\s*"
_PER_100ML: Final = re.compile(rf"{_PER}100\s*{_VOLUME}", re.IGNORECASE)
_PER_ML: Final = re.compile(rf"{_PER}(?:(?:1|one)\s*|a\s+)?{_VOLUME}", re.IGNORECASE)
_NUMBER: Final = r"[0-9]+(?:[.,'][0-9]+)*"
_COUNTED: Final = re.compile(
    rf"\b(?:counted|volume)\b\s*[:=]?\s*(?P<after>{_NUMBER})\s*{_VOLUME}"
    rf"|(?P<before>{_NUMBER})\s*{_VOLUME}\s*(?:were\s+)?counted\b",
    re.IGNORECASE,
)
_STANDARD: Final = re.compile(r"\bISO\s*-?\s*[0-9]{4,5}\b(?:\s*[:-]\s*(?:19|20)[0-9]{2}\b(?!\s*/))?", re.IGNORECASE)
_MICRON: Final = r"(?:µm|um|microns?\b|mic\b)\s*(?:\(?[cb]\)|c\b)?"
_AT_LEAST: Final = r"(?:[≥>]=?\s*)?"
_COMMA: Final = rf"\s*(?:[/,;&]|and)\s*{_AT_LEAST}"
_SIZE_LIST: Final = re.compile(
    rf"{_AT_LEAST}(?P<sizes>4{_COMMA}6{_COMMA}14|5{_COMMA}15)\s*{_MICRON}",
    re.IGNORECASE,
)
_SIZE: Final = rf"{_AT_LEAST}\b(?P<size>4|5|6|14|15|21|38|70)\s*{_MICRON}"
_GROUPED: Final = rf"(?:[0-9]{{1,3}}(?: [0-9]{{3}})+(?![0-9])(?:[.,][0-9]+)?|{_NUMBER})"
_LABEL_FIRST: Final = re.compile(rf"{_SIZE}\s*[:=]?\s*(?P<count>{_GROUPED})(?!\s*(?:µm|um\b))", re.IGNORECASE)
_COUNT_FIRST: Final = re.compile(rf"(?P<count>{_GROUPED})\s*[(\[@]?\s*(?:at\s+)?{_SIZE}", re.IGNORECASE)
_PART: Final = r"(?:\*|-|(?:≥|>=|>)?\s*[0-9]{1,3})"
_CODE: Final = re.compile(rf"(?<![0-9/.,*-]){_PART}\s*/\s*{_PART}(?:\s*/\s*{_PART})?(?![0-9]|\s*/|[.,:][0-9])")
_CODE_WORD: Final = re.compile(r"\bcode\b[^0-9*-]{0,12}\Z", re.IGNORECASE)
_SLASHED: Final = re.compile(rf"(?<![0-9/]){_NUMBER}\s*/\s*{_NUMBER}(?:\s*/\s*{_NUMBER})?(?![0-9]|\s*/)")
_MOMENT: Final = re.compile(
    r"[0-9]{1,4}([-/.])[0-9]{1,2}\1[0-9]{2,4}|[0-9]{1,2}\.?\s+[a-z]{3,9}\.?\s+[0-9]{4}|[0-9]{1,2}:[0-9]{2}(?::[0-9]{2})?",
    re.IGNORECASE,
)
_NEGATIVE: Final = re.compile(r"(?:^|[\s;,|:])-\s?[0-9]")
_BOUND: Final = re.compile(r"[<≤]\s*=?\s*[0-9]")
_WORDS: Final = re.compile(r"[^\W\d_]+")


@dataclass(frozen=True, slots=True)
class Pasted:
    """What was understood. ``counts`` are as written, in ``basis``; both are None where the text has only a code.

    With ``microscope`` the first count is None, the others are 5 and 15 µm. With ``unread`` there are more figures in
    the text, which nobody read. With a ``problem`` nothing else counts.
    """

    code: IsoCode | None = None
    counts: Counts | None = None
    basis: Basis | None = None
    microscope: bool = False
    counted_ml: Decimal | None = None
    unread: bool = False
    problem: Problem | None = None

    @property
    def needs_basis(self) -> bool:
        return self.counts is not None and self.basis is None

    @property
    def per_ml(self) -> Counts | None:
        """The counts in particles per mL [1/mL], or None while the unit is unknown."""
        if self.counts is None or self.basis is None:
            return None
        four, six, fourteen = (None if count is None else per_ml_from(count, self.basis) for count in self.counts)
        return four, six, fourteen


def read_pasted(text: str) -> Pasted:
    """Read a pasted code or counts.

    Understands ``19/17/13``, ``ISO 4406: 19/17/13``, ``39120 9610 710 /100 ml``, ``391.2; 96.1; 7.1 per mL``,
    ``4 µm 2178 6 µm 847 14 µm 63 particles/ml``, thousands separators, decimal commas, ``counted 25 mL``, and such a
    piece inside a line of other text. Two counts or two numbers are 5 and 15 µm under the microscope.

    Problem codes: those of `fleet.codes.parse_iso_code` and `samples.coding.iso4406.code_from_counts`, and
    ``paste_empty``, ``paste_too_long``, ``paste_not_understood``, ``paste_several_codes``, ``paste_two_units``,
    ``paste_ambiguous``, ``paste_bound``, ``paste_wrong_number_of_counts``.

    >>> read_pasted("39120 9610 710 /100 ml").per_ml
    (Decimal('391.20'), Decimal('96.10'), Decimal('7.10'))
    """
    tidy = text.translate(_TIDY).strip()
    if not tidy:
        return _failed(
            "paste_empty", "Nothing was pasted. Paste a code such as 19/17/13, or the counts with their unit."
        )
    if len(tidy) > _LONGEST:
        return _failed(
            "paste_too_long", "This is more than one result. Paste only the line with the code or the counts."
        )
    counted_ml, tidy = _take_counted_volume(tidy)
    bases, tidy = _take_basis(tidy)
    if len(bases) > 1:
        return _failed("paste_two_units", "Both “per mL” and “per 100 mL” are in the text. Paste counts with one unit.")
    basis = bases[0] if bases else None
    named = _STANDARD.sub(" code ", tidy)
    found = _understand(named, basis)
    if found.problem is not None:
        return found
    return replace(
        found,
        basis=basis if found.counts else None,
        counted_ml=counted_ml,
        microscope=_is_microscope(found),
        unread=_has_more_figures(named, found),
    )


def _has_more_figures(text: str, found: Pasted) -> bool:
    """Whether figures are left when what was understood and every date is taken out. Bare counts take all."""
    slashed = found.counts is not None and _SLASHED.search(_without_codes(text)) is not None
    if found.counts is not None and not slashed and _labelled_counts(text) is None:
        return False
    bare = _SIZE_LIST.sub(" ", _without_labels(text)) if found.counts is not None else _SIZE_LIST.sub(" ", text)
    rest = re.sub(_SIZE, " ", _SLASHED.sub(" ", _CODE.sub(" ", _MOMENT.sub(" ", bare))), flags=re.IGNORECASE)
    return re.search(r"(?<![\w.-])[0-9]", rest) is not None


def _understand(text: str, basis: Basis | None) -> Pasted:
    labelled = _labelled_counts(text)
    if labelled is not None:
        return _with_code(labelled, _find_code(_without_labels(text), basis))
    sized = _SIZE_LIST.search(text)
    bare = _SIZE_LIST.sub(" ", text)
    found = _find_code(bare, basis)
    if found.problem is not None:
        return found
    if found.code is not None and basis is None:
        return found
    counts = _find_counts(_without_codes(bare), two=sized is not None and sized["sizes"].startswith("5"))
    if found.code is not None and counts.problem is not None:
        return found
    return _with_code(counts, found)


def _with_code(counts: Pasted, found: Pasted) -> Pasted:
    return counts if counts.problem is not None else replace(counts, code=found.code)


def _find_code(text: str, basis: Basis | None) -> Pasted:
    """The one code in the text, if any. With a unit present, numbers beyond the scale are counts with slashes."""
    codes: set[IsoCode] = set()
    first_error: CodeError | None = None
    for candidate in _code_candidates(text):
        try:
            codes.add(parse_iso_code(candidate))
        except CodeError as error:
            first_error = first_error or error
    if len(codes) > 1:
        shown = " and ".join(sorted(str(code) for code in codes))
        return _failed("paste_several_codes", f"The text holds several codes: {shown}. Paste only the one you want.")
    if not codes and first_error is not None and basis is None:
        return _failed(first_error.code, first_error.sentence)
    return Pasted(code=codes.pop() if codes else None)


def _code_candidates(text: str) -> list[str]:
    """Everything shaped like a code; where some stand right behind the word "code", only those (23/10/05 is a date)."""
    matches = list(_CODE.finditer(text))
    named = [match for match in matches if _CODE_WORD.search(text[: match.start()])]
    return [match[0].strip() for match in named or matches]


def _without_codes(text: str) -> str:
    return _CODE.sub(lambda match: " " if _is_code(match[0]) else match[0], text)


def _is_code(text: str) -> bool:
    try:
        parse_iso_code(text)
    except CodeError:
        return False
    return True


def _labelled_counts(text: str) -> Pasted | None:
    for pattern in (_LABEL_FIRST, _COUNT_FIRST):
        found = {match["size"]: match["count"] for match in pattern.finditer(text)}
        sizes = ("4", "6", "14") if {"6", "14"} & found.keys() else ("5", "15")
        if sum(size in found for size in sizes) >= 2:
            return _counts_from([found.get(size) for size in sizes])
    return None


def _without_labels(text: str) -> str:
    return _COUNT_FIRST.sub(" ", _LABEL_FIRST.sub(" ", text))


def _find_counts(text: str, *, two: bool) -> Pasted:
    if _NEGATIVE.search(text):
        return _failed("count_negative", "A count cannot be negative. Check the sign.")
    if _BOUND.search(text):
        return _failed(
            "paste_bound", "A count with “<” is only a bound. Paste the code, or type the counts one by one."
        )
    slashed = _SLASHED.search(text)
    if slashed is not None:
        return _counts_from([part.strip() for part in slashed[0].split("/")])
    fields = re.split(r"[;|\t\n]+|,\s+|\s/\s", _WORDS.sub(" ", text))
    numbers = [re.sub(r"[^0-9.,' ]+", " ", field).strip(" .,'") for field in fields if re.search("[0-9]", field)]
    if len(numbers) in (2, 3) and all(read_number(number, decimal_mark=".").value is not None for number in numbers):
        return _counts_from(numbers)
    return _counts_from_words(" ".join(numbers).split(), sizes=2 if two else 3)


def _counts_from_words(words: Sequence[str], sizes: int) -> Pasted:
    if not words:
        return _not_understood()
    if len(words) in (2, 3):
        return _counts_from(words)
    if len(words) == 1 and re.fullmatch(r"[0-9]+(?:,[0-9]+){1,2}", words[0]):
        return _counts_from(words[0].split(","))
    readings = {counts for counts in _groupings(words, sizes) if _falls(counts)} if len(words) <= 12 else set()
    if len(readings) == 1:
        return _counts_from(readings.pop())
    held = "one number" if len(words) == 1 else f"{len(words)} numbers"
    return _failed(
        "paste_wrong_number_of_counts",
        f"Three counts (4, 6 and 14 µm) or two (5 and 15 µm) are needed; the text holds {held}. "
        "Paste the counts alone, with semicolons between.",
    )


def _groupings(words: Sequence[str], sizes: int) -> Iterator[tuple[str, ...]]:
    """Every way to join words into ``sizes`` numbers with spaces between thousands: 39 120 9 610 710."""
    for cuts in combinations(range(1, len(words)), sizes - 1):
        groups = [" ".join(words[start:end]) for start, end in pairwise((0, *cuts, len(words)))]
        if all(re.fullmatch(_GROUPED, group) for group in groups):
            yield tuple(groups)


def _falls(texts: Sequence[str]) -> bool:
    values = [value for text in texts if (value := read_number(text, decimal_mark=".").value) is not None]
    return len(values) == len(texts) and all(left >= right for left, right in pairwise(values))


def _counts_from(texts: Sequence[str | None]) -> Pasted:
    """Counts from the texts of each size. Where a comma or point can be read two ways, the falling order decides."""
    given = [text is not None for text in texts]
    marks: tuple[DecimalMark, DecimalMark] = (".", ",")
    readings = {
        tuple(None if text is None else read_number(text, decimal_mark=mark).value for text in texts) for mark in marks
    }
    complete = [_three(counts) for counts in readings if [count is not None for count in counts] == given]
    falling = [counts for counts in complete if _problem_with(counts) is None]
    if len(falling) > 1:
        return _failed(
            "paste_ambiguous",
            "The commas or points can separate thousands or decimals. Paste the counts without thousands separators.",
        )
    if not complete:
        return _not_understood()
    best = (falling or complete)[0]
    return Pasted(counts=best, problem=_problem_with(best))


def _problem_with(counts: Counts) -> Problem | None:
    try:
        code_from_counts(*counts)
    except CodeError as error:
        return Problem(error.code, error.sentence)
    return None


def _three(counts: Sequence[Decimal | None]) -> Counts:
    padded = [None] * (3 - len(counts)) + list(counts)
    return padded[0], padded[1], padded[2]


def _take_basis(text: str) -> tuple[list[Basis], str]:
    bases: list[Basis] = []
    without_100, per_100 = _PER_100ML.subn(" ", text)
    rest, per_1 = _PER_ML.subn(" ", without_100)
    if per_100:
        bases.append("per_100ml")
    if per_1:
        bases.append("per_ml")
    return bases, rest


def _take_counted_volume(text: str) -> tuple[Decimal | None, str]:
    match = _COUNTED.search(text)
    if match is None:
        return None, text
    volume = read_number(match["after"] or match["before"]).value
    return volume or None, _COUNTED.sub(" ", text)


def _is_microscope(found: Pasted) -> bool:
    if found.counts is not None:
        return found.counts[0] is None
    return found.code is not None and found.code.is_two_number


def _not_understood() -> Pasted:
    return _failed(
        "paste_not_understood",
        "No code and no counts were found. Paste a code such as 19/17/13, or counts with their unit: 391 96 7 per mL.",
    )


def _failed(code: str, sentence: str) -> Pasted:
    return Pasted(problem=Problem(code, sentence))
