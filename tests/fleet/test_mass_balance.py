"""The filtration mass balance against published figures and a numerical solution."""

import csv
from collections.abc import Iterator
from math import exp, log
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from fleet.mass_balance import (
    Loop,
    beta_from_counts,
    count_after,
    downstream_per_ml,
    efficiency_from_beta,
    floor_per_ml,
    ingress_from_floor,
    ingress_from_rise,
    minutes_to,
    turnovers,
)

FloatArray = NDArray[np.float64]

# CDC, Guidelines for preventing the transmission of Mycobacterium tuberculosis, MMWR 1994;43(RR-13), Table S3-1.
MMWR = Path(__file__).parent / "data" / "mixing_tank_removal_times_mmwr1994.csv"


def loop(volume: float, flow: float, beta: float, ingress: float = 0.0) -> Loop:
    return Loop(volume, flow, efficiency_from_beta(beta), ingress)


def mmwr_cells() -> Iterator[tuple[float, float, float]]:
    with MMWR.open(newline="") as file:
        for row in csv.DictReader(file):
            for percent in ("90", "99", "99.9"):
                yield float(row["turnovers_per_hour"]), float(percent), float(row[f"min_to_{percent}pct"])


@pytest.mark.parametrize(("air_changes", "percent", "minutes"), list(mmwr_cells()))
def test_removal_times_agree_with_the_published_ventilation_table(
    air_changes: float, percent: float, minutes: float
) -> None:
    room = Loop(volume_l=1.0, flow_l_min=air_changes / 60.0, efficiency=1.0)
    assert minutes_to(room, 100.0, 100.0 - percent) == pytest.approx(minutes, abs=0.5)


# Widely printed multi-pass arithmetic (ISO 16889): beta from counts before and after, efficiency = 100(1 - 1/beta).
@pytest.mark.parametrize(
    ("up", "down", "beta", "percent"), [(1000, 50, 20, 95), (10000, 50, 200, 99.5), (1000, 10, 100, 99)]
)
def test_beta_and_efficiency_follow_from_counts(up: float, down: float, beta: float, percent: float) -> None:
    assert beta_from_counts(up, down) == pytest.approx(beta, rel=1e-9)
    assert 100 * efficiency_from_beta(beta) == pytest.approx(percent, abs=1e-9)


@pytest.mark.parametrize(
    ("beta", "percent"), [(2, 50), (10, 90), (20, 95), (75, 98.67), (200, 99.5), (1000, 99.9), (20000, 99.995)]
)
def test_efficiency_agrees_with_printed_beta_tables(beta: float, percent: float) -> None:
    assert 100 * efficiency_from_beta(beta) == pytest.approx(percent, abs=0.005)


def test_seven_turnovers_of_thirty_gallons_at_five_a_minute_take_forty_two_minutes() -> None:
    # Trade rule of thumb for filter carts (one source, volumes in US gallons; the unit cancels).
    tank = Loop(30.0, 5.0, 1.0)
    assert turnovers(tank, 42.0) == pytest.approx(7.0)
    assert count_after(tank, 1.0, 42.0) == pytest.approx(0.0009118819655545162, rel=1e-6)


def test_three_nines_take_six_point_nine_turnovers() -> None:
    # Aquarium turnover derivation, published as 6.90776 V/F.
    assert minutes_to(Loop(1.0, 1.0, 1.0), 1000.0, 1.0) == pytest.approx(6.907755, abs=5e-6)


# Own rows, closed form checked against a numerical solution to 1e-10: the loop, start and target per mL; then floor per
# mL, minutes to target and count after the element at the floor.
WORKED = [
    (loop(200, 10, 75), 10000, 160, (0.0, 83.82094, 0.0)),
    (loop(200, 10, 75, 1e6), 10000, 160, (101.351351, 103.95788, 1.351351)),
    (loop(300, 15, 10, 2e6), 5000, 320, (148.148148, 74.23295, 14.814815)),
]


@pytest.mark.parametrize(("tank", "start", "target", "expected"), WORKED)
def test_worked_loops_come_out(tank: Loop, start: float, target: float, expected: tuple[float, float, float]) -> None:
    floor = floor_per_ml(tank) or 0.0
    found = (floor, minutes_to(tank, start, target), downstream_per_ml(tank, floor))
    assert found == pytest.approx(expected, rel=1e-4)


def test_a_target_below_the_floor_is_never_reached() -> None:
    tank = loop(200, 10, 2, 2e6)
    assert floor_per_ml(tank) == pytest.approx(400.0)
    assert minutes_to(tank, 5000.0, 320.0) is None


def test_steady_counts_obey_the_contamination_control_equation() -> None:
    # Downstream count = R / (Q (beta - 1)), attributed to Fitch; 75 L/min.
    tank = loop(100.0, 75.0, 75, 1e8)
    upstream = floor_per_ml(tank)
    assert upstream == pytest.approx(1351.3513513513515, rel=1e-9)
    assert downstream_per_ml(tank, upstream or 0.0) == pytest.approx(18.01801801801802, rel=1e-9)


@pytest.mark.parametrize(("ingress", "minutes"), [(0, 63), (1e6, 72), (2e6, 87), (3e6, 133)])
def test_nearness_to_the_floor_rules_the_time(ingress: float, minutes: float) -> None:
    # 1000 L, 40 L/min, efficiency 0.995, from 1000 to 80 per mL: own computation, rounded to the minute.
    assert minutes_to(Loop(1000, 40, 0.995, ingress), 1000, 80) == pytest.approx(minutes, abs=0.6)


def test_the_closed_form_is_the_solution_of_the_equation() -> None:
    tank = Loop(640.0, 25.0, 0.9, 3e6, mixing=1.7)

    def slope(_: float, count: FloatArray) -> FloatArray:
        return np.asarray((tank.ingress_per_min / 1000.0 - 25.0 * 0.9 / 1.7 * count) / 640.0)

    solved = solve_ivp(slope, (0.0, 90.0), [4000.0], rtol=1e-11, atol=1e-9)
    assert count_after(tank, 4000.0, 90.0) == pytest.approx(solved.y[0][-1], rel=1e-8)


def test_without_a_loop_counts_rise_in_a_straight_line() -> None:
    tank = Loop(500.0, 0.0, 0.9, 2e6)
    assert floor_per_ml(tank) is None
    assert count_after(tank, 100.0, 60.0) == pytest.approx(100.0 + 2e6 * 60.0 / 500_000.0)
    assert minutes_to(tank, 300.0, 200.0) is None


def test_ingress_is_found_again_from_a_rise_and_from_a_floor() -> None:
    still, running = Loop(500.0, 0.0, 0.9, 2e6), Loop(500.0, 20.0, 0.9, 2e6)
    assert ingress_from_rise(500.0, 100.0, count_after(still, 100.0, 45.0), 45.0) == pytest.approx(2e6)
    assert ingress_from_floor(running, floor_per_ml(running) or 0.0) == pytest.approx(2e6)


def test_poor_mixing_takes_as_many_times_longer() -> None:
    good, poor = Loop(100.0, 10.0, 1.0), Loop(100.0, 10.0, 1.0, mixing=3.0)
    assert minutes_to(poor, 80.0, 10.0) == pytest.approx(3.0 * (minutes_to(good, 80.0, 10.0) or 0.0))
    assert count_after(poor, 80.0, 30.0) == pytest.approx(80.0 * exp(-1.0))


@given(st.floats(1, 1e4), st.floats(0.1, 500), st.floats(1.01, 5000), st.floats(0, 1e9), st.floats(0.1, 1e6))
def test_running_to_the_target_ends_at_the_target(
    volume: float, flow: float, beta: float, ingress: float, start: float
) -> None:
    tank = loop(volume, flow, beta, ingress)
    target = ((floor_per_ml(tank) or 0.0) + start) / 2.0
    minutes = minutes_to(tank, start, target)
    if minutes is not None and minutes > 0:
        assert count_after(tank, start, minutes) == pytest.approx(target, rel=1e-6)


@pytest.mark.parametrize(
    "bad",
    [
        {"volume_l": 0},
        {"flow_l_min": -1},
        {"efficiency": 1.2},
        {"ingress_per_min": -1},
        {"mixing": 0.5},
        {"volume_l": float("nan")},
    ],
)
def test_impossible_loops_are_refused(bad: dict[str, float]) -> None:
    with pytest.raises(ValueError):
        Loop(**{"volume_l": 100.0, "flow_l_min": 10.0, "efficiency": 0.9} | bad)


def test_impossible_betas_are_refused() -> None:
    with pytest.raises(ValueError, match="at least 1"):
        efficiency_from_beta(0.5)
    with pytest.raises(ValueError, match="above nought"):
        beta_from_counts(100.0, 0.0)
    with pytest.raises(ValueError, match="apart"):
        ingress_from_rise(100.0, 1.0, 2.0, 0.0)


def test_a_code_step_without_ingress_takes_log_two_of_a_clean_turnover() -> None:
    # n steps take n ln 2 / efficiency turnovers; the published hand figure for beta 75 is 0.70 n.
    tank = loop(100.0, 10.0, 75)
    assert turnovers(tank, minutes_to(tank, 800.0, 100.0) or 0.0) == pytest.approx(3 * log(2) * 75 / 74)
    assert 3 * log(2) * 75 / 74 == pytest.approx(3 * 0.70, abs=0.02)
