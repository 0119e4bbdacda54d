"""The first page: every reservoir, worst first."""

from django.core.paginator import Paginator
from django.http import HttpRequest, HttpResponseBase
from django.shortcuts import render
from django.utils import timezone

from fleet.addresses import same_list
from fleet.board import SORTS, BoardRow, board_row, ordered, totals
from fleet.export import csv_response
from fleet.forms.board import BoardFilter
from fleet.models import Reservoir, StandingWord

A_PAGE = 100
COLUMNS = [
    ("criticality", "Crit.", ""),
    ("reservoir", "Reservoir", ""),
    ("code", "Latest code", ""),
    ("worst", "Against target (dashed) and limit (solid)", ""),
    ("headroom", "Headroom", "num"),
    ("runway", "Runway to limit, 80 % range", "num"),
    ("", "Last 12", "spare"),
    ("age", "Age", "num"),
]


CSV_HEADINGS = [
    *("tag", "machine", "reservoir", "area", "criticality", "standing", "code", "target", "limit", "because"),
    *("headroom", "headroom unit", "runway", "chance before next sample", "last drawn", "next planned"),
]


def board(request: HttpRequest) -> HttpResponseBase:
    as_of = timezone.now()
    form = BoardFilter(request.GET or None)
    sort = request.GET.get("sort", "")
    place = form.place()
    shown = ordered(form.narrow(place, as_of), sort.removeprefix("-"), sort.startswith("-")).with_standing()
    if request.GET.get("format") == "csv":
        return csv_response("board", CSV_HEADINGS, (_csv_row(board_row(one, as_of)) for one in shown.iterator()))
    page = Paginator(shown, A_PAGE).get_page(request.GET.get("page"))
    rows = [board_row(reservoir, as_of) for reservoir in page]
    context = {
        "form": form,
        "pending": any(row.standing and row.standing.wanted_at for row in rows),
        "totals": totals(place, as_of),
        "rows": rows,
        "page": page,
        "columns": _columns(request, sort),
        "here": same_list(request),
        "csv": same_list(request, format="csv"),
        "empty": not page and not Reservoir.objects.exists(),
    }
    return render(request, "fleet/board.html", context)


def _csv_row(row: BoardRow) -> list[object]:
    reservoir, standing = row.reservoir, row.standing
    place = [reservoir.tag, reservoir.machine.name, reservoir.name, reservoir.area.name, reservoir.criticality]
    word = StandingWord(row.word).label
    if standing is None:
        return [*place, word]
    figures = [standing.code_text, standing.target_text, standing.limit_text, standing.because]
    headroom = None if standing.headroom is None else round(standing.headroom, 2)
    past = standing.word == StandingWord.PAST_LIMIT
    chance = None if past or standing.chance_before_next is None else round(standing.chance_before_next, 3)
    zone = reservoir.area.site.zone
    moments = [at and at.astimezone(zone) for at in (standing.last_drawn_at, standing.next_due_at)]
    return [*place, word, *figures, headroom, standing.headroom_unit, row.runway, chance, *moments]


def _columns(request: HttpRequest, sort: str) -> list[dict[str, str]]:
    """Headings that sort: the address of the next order, and which way it runs now."""
    chosen = sort.removeprefix("-") if sort.removeprefix("-") in SORTS else "worst"
    columns = []
    for key, label, css in COLUMNS:
        is_chosen = key == chosen
        downward = is_chosen and sort.startswith("-")
        following = f"-{key}" if is_chosen and not downward else key
        order = ("descending" if downward else "ascending") if is_chosen else ""
        columns.append(
            {"label": label, "css": css, "order": order, "url": same_list(request, sort=following) if key else ""}
        )
    return columns
