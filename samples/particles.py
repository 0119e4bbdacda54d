"""Particle counts as a form gets them: pasted, typed, or both; never a guess where the two do not agree. Pure."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from decimal import Decimal

from fleet.codes import CodeError, IsoCode
from samples.coding.iso4406 import Basis, code_from_counts, per_ml_from
from samples.coding.pasted import Pasted
from samples.intake.numbers import ReadNumber, number_of
from samples.problems import Problem
from samples.readings import Reading, readings_from_code, readings_from_counts

Three = tuple[ReadNumber | None, ReadNumber | None, ReadNumber | None]
BASIS_MISSING = Problem(
    "basis_missing", "Choose what the counts are for: 1 mL or 100 mL. The report says which; they differ by 100."
)


@dataclass(frozen=True, slots=True)
class TypedCounts:
    """The counts as typed, in `basis`; with `microscope` the second and third are 5 and 15 µm.

    `by_counter` says that two pasted numbers come from an automatic counter that left out 4 µm.
    """

    counts: Three = (None, None, None)
    basis: Basis | None = None
    counted_ml: Decimal | None = None
    microscope: bool = False
    by_counter: bool = False


@dataclass(slots=True)
class Particles:
    """What was understood, and `notes` on how the paste was read. `problems` name the field they belong to;
    with any of them nothing else counts.
    """

    readings: list[Reading] = field(default_factory=list)
    stated_code: IsoCode | None = None
    problems: list[tuple[str, Problem]] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def object(self, name: str, code: str, sentence: str) -> None:
        self.problems.append((name, Problem(code, sentence)))


def read_particles(pasted: Pasted, typed: TypedCounts, usual_counted_ml: float | None = None) -> Particles:
    """Counts, or the code where there are no counts, as readings.

    `usual_counted_ml` [mL] is the laboratory's volume, taken where neither the paste nor the field says one. Problem
    fields: paste, p4, basis, counted_ml, microscope, by_counter.
    """
    found = Particles(stated_code=pasted.code, notes=_notes(pasted, typed))
    if pasted.problem is not None:
        found.problems.append(("paste", pasted.problem))
        return found
    if typed.microscope and typed.by_counter:
        found.object("by_counter", "counter_and_microscope", "Choose the counter or the microscope, not both.")
        return found
    counts = _agreed_counts(pasted, typed, found)
    if counts is None:
        _read_code(pasted, typed, found)
        return found
    basis = _agreed_basis(pasted, typed, found)
    volume = _agreed_volume(pasted, typed, usual_counted_ml, found)
    if basis is not None and not found.problems:
        _code_them(counts, basis, volume, _by_microscope(pasted, typed), found)
    return found


def _by_microscope(pasted: Pasted, typed: TypedCounts) -> bool:
    return typed.microscope or (pasted.microscope and not typed.by_counter)


def _notes(pasted: Pasted, typed: TypedCounts) -> list[str]:
    notes = []
    if pasted.microscope and not (typed.microscope or typed.by_counter):
        what = "a microscope code" if pasted.counts is None else "microscope counts"
        notes.append(
            f"Read as {what}, 5 and 15 µm. If an automatic counter left out 4 µm, say so below the counts: "
            "then they are 6 and 14 µm."
        )
    if pasted.unread:
        what = "code was" if pasted.counts is None else "counts were"
        notes.append(f"Only the {what} read from the line. Type the other figures below.")
    return notes


def _agreed_counts(pasted: Pasted, typed: TypedCounts, found: Particles) -> Three | None:
    from_paste = _numbers(pasted.counts) if pasted.counts is not None else None
    if not any(typed.counts):
        return from_paste
    if from_paste is not None and not _same(from_paste, pasted.basis or typed.basis, typed):
        said = "The pasted counts are not those in the three fields. Clear the one that is wrong."
        found.object("paste", "counts_differ", said)
    return typed.counts


def _numbers(counts: Sequence[Decimal | None]) -> Three:
    four, six, fourteen = (None if count is None else number_of(count) for count in counts)
    return four, six, fourteen


def _same(pasted: Three, pasted_basis: Basis | None, typed: TypedCounts) -> bool:
    """Whether both say the same number of particles in each size; without any unit, the same figures."""
    left = [_per_ml(number, pasted_basis) for number in pasted]
    right = [_per_ml(number, typed.basis or pasted_basis) for number in typed.counts]
    return left == right


def _per_ml(number: ReadNumber | None, basis: Basis | None) -> Decimal | None:
    if number is None or number.value is None:
        return None
    return per_ml_from(number.value, basis) if basis else number.value


def _agreed_basis(pasted: Pasted, typed: TypedCounts, found: Particles) -> Basis | None:
    """Typed counts take the basis chosen beside them; pasted counts bring their own, or borrow the chosen one."""
    if pasted.basis and typed.basis and pasted.basis != typed.basis and not any(typed.counts):
        said = "The pasted text names another unit than the one chosen here. Check the report and choose one."
        found.object("basis", "basis_differs", said)
    basis = (typed.basis or pasted.basis) if any(typed.counts) else (pasted.basis or typed.basis)
    if basis is None:
        found.problems.append(("basis", BASIS_MISSING))
    return basis


def _agreed_volume(
    pasted: Pasted, typed: TypedCounts, usual_counted_ml: float | None, found: Particles
) -> Decimal | None:
    if pasted.counted_ml and typed.counted_ml and pasted.counted_ml != typed.counted_ml:
        said = f"The pasted text says {pasted.counted_ml:f} mL were counted. Clear the one that is wrong."
        found.object("counted_ml", "counted_volume_differs", said)
    usual = None if usual_counted_ml is None else Decimal(repr(usual_counted_ml))
    return typed.counted_ml or pasted.counted_ml or usual


def _code_them(counts: Three, basis: Basis, volume: Decimal | None, microscope: bool, found: Particles) -> None:
    four, six, fourteen = (
        None if number is None or number.value is None or number.qualifier else per_ml_from(number.value, basis)
        for number in counts
    )
    if microscope and counts[0] is not None:
        said = "A microscope count has no 4 µm size. Leave it empty, or take back the microscope."
        found.object("p4", "microscope_has_no_four", said)
        return
    try:
        if any(count is not None for count in (four, six, fourteen)):
            code_from_counts(four, six, fourteen, counted_ml=volume, microscope=microscope)
    except CodeError as error:
        found.object("p4", error.code, error.sentence)
        return
    found.readings = readings_from_counts(*counts, basis=basis, counted_ml=volume, microscope=microscope)


def _read_code(pasted: Pasted, typed: TypedCounts, found: Particles) -> None:
    if pasted.code is None:
        return
    if typed.microscope and not pasted.code.is_two_number:
        said = "A code of three numbers comes from a counter. Take back the microscope, or paste the two numbers."
        found.object("microscope", "microscope_has_no_four", said)
        return
    found.readings = readings_from_code(
        pasted.code, microscope=typed.microscope or (False if typed.by_counter else None)
    )
