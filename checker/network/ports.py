"""Find the currents of loads and sources that depend on their voltage, by Newton's method on their ports.

The network is seen from the ports alone: open voltages and impedances, from one solve a port.
"""

from __future__ import annotations

from collections.abc import Sequence

from checker.network.conditions import CONSTANT_POWER, HOLDING, RESISTIVE, Draw, Feed
from checker.network.elimination import Factor

MOST_STEPS = 60
SETTLED_V = 1e-10
STIFF = 1e-5
"""How far a holding source sags at full current, as a share of its voltage: enough to keep the equations posed."""


def port_currents(
    factor: Factor, draws: Sequence[Draw], ports: Sequence[tuple[int, int]], injected: Sequence[float]
) -> list[float] | None:
    """Return the current of each load at the voltage that it then has, A; None where there is none.

    Args:
        factor: The network, factorised.
        draws: Loads whose current depends on their voltage.
        ports: The two places of each load.
        injected: What everything else puts into each place, A, shape (places,).
    """
    open_v = _across(factor.solve(injected), ports)
    impedance: list[list[float]] = []
    for feed, back in ports:
        unit = [0.0] * len(injected)
        unit[feed] += 1.0
        unit[back] -= 1.0
        impedance.append(_across(factor.solve(unit), ports))
    volts = list(open_v)
    for _ in range(MOST_STEPS):
        # Below half its nominal voltage a load of constant power is past the knee of its curve.
        if any(not v > 0.5 * d.nominal_v for v, d in zip(volts, draws, strict=True) if d.model == CONSTANT_POWER):
            break
        bent = [_current(draw, v) for draw, v in zip(draws, volts, strict=True)]
        lost = [sum(z * current for z, (current, _) in zip(row, bent, strict=True)) for row in impedance]
        wrong = [v - o + drop for v, o, drop in zip(volts, open_v, lost, strict=True)]
        if max(abs(w) for w in wrong) < SETTLED_V:
            return [current for current, _ in bent]
        slopes = [
            [(1.0 if i == j else 0.0) + row[j] * bent[j][1] for j in range(len(draws))]
            for i, row in enumerate(impedance)
        ]
        step = _solve_dense(slopes, wrong)
        if step is None:
            break
        volts = [v - s for v, s in zip(volts, step, strict=True)]
    return None


def holding_draw(feed: Feed) -> Draw:
    """Return a source that holds its voltage as a load: what flows into it, negative while it gives."""
    return Draw(f"{feed.name} holding", feed.out, feed.back, feed.current_a, feed.holds_v or 0.0, HOLDING)


def _across(volts: Sequence[float], ports: Sequence[tuple[int, int]]) -> list[float]:
    return [volts[feed] - volts[back] for feed, back in ports]


def _current(draw: Draw, volts: float) -> tuple[float, float]:
    """Return a load's current at a voltage, and its slope dI/dV."""
    if draw.model == RESISTIVE:
        siemens = draw.current_a / draw.nominal_v
        return siemens * volts, siemens
    if draw.model == HOLDING:  # behind a resistance so small that it sags by no more than STIFF at full current
        siemens = draw.current_a / (draw.nominal_v * STIFF)
        return siemens * (volts - draw.nominal_v), siemens
    power_w = draw.current_a * draw.nominal_v
    return power_w / volts, -power_w / volts**2


def _solve_dense(matrix: list[list[float]], right: list[float]) -> list[float] | None:
    """Solve a small dense system; None where it is singular."""
    size = len(right)
    rows = [[*row, value] for row, value in zip(matrix, right, strict=True)]
    for column in range(size):
        best = max(range(column, size), key=lambda r: abs(rows[r][column]))
        if abs(rows[best][column]) < 1e-12:
            return None
        rows[column], rows[best] = rows[best], rows[column]
        for below in range(column + 1, size):
            factor = rows[below][column] / rows[column][column]
            rows[below] = [x - factor * y for x, y in zip(rows[below], rows[column], strict=True)]
    found = [0.0] * size
    for row in range(size - 1, -1, -1):
        known = sum(rows[row][k] * found[k] for k in range(row + 1, size))
        found[row] = (rows[row][size] - known) / rows[row][row]
    return found
