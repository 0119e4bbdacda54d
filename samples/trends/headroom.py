"""Distance to the limit on the measurand's own scale: code steps for counts, percent of the span for all others."""

from samples.trends.forecast import Side
from samples.trends.scales import Scale, ScaleSpec, figure_to_y, y_to_figure
from samples.trends.standing import Line


def side_distance(y: float, limit: float, side: Side, spec: ScaleSpec) -> float:
    """Headroom of `y` against one side of the limit (a figure); negative: past.

    Counts: code steps, log2(limit) - y. Others: percent of the span between the fresh charge's value (percent scale: no
    change; unknown: nought) and the limit. With a lower limit and no fresh value the limit itself is the span.
    """
    if spec.scale is Scale.COUNT:
        return side.sign * (figure_to_y(limit, spec) - y)
    start = 0.0 if spec.scale is Scale.PERCENT or spec.baseline is None else spec.baseline
    span = abs(limit - start) or abs(limit) or 1.0
    return 100.0 * side.sign * (limit - float(y_to_figure(y, spec))) / span


def headroom(y: float, limit: Line, spec: ScaleSpec) -> float | None:
    """The smaller distance to the sides of the limit; None without a limit."""
    distances = [side_distance(y, figure, side, spec) for side, figure in sides(limit)]
    return min(distances, default=None)


def nearest_side(y: float, limit: Line, spec: ScaleSpec) -> Side | None:
    """The side of the limit that `y` is closer to; None without a limit."""
    known = sides(limit)
    return min(known, key=lambda s: side_distance(y, s[1], s[0], spec))[0] if known else None


def target_mark(target: Line, limit: Line, side: Side, spec: ScaleSpec) -> float | None:
    """Where the target lies on the same scale: its headroom to the limit of that side; None where either is not set."""
    figures = (target.high, limit.high) if side is Side.UPPER else (target.low, limit.low)
    if figures[0] is None or figures[1] is None:
        return None
    return side_distance(figure_to_y(figures[0], spec), figures[1], side, spec)


def sides(line: Line) -> list[tuple[Side, float]]:
    """The figures of a target or limit with their sides, upper first."""
    pairs = ((Side.UPPER, line.high), (Side.LOWER, line.low))
    return [(side, figure) for side, figure in pairs if figure is not None]
