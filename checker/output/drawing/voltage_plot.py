"""Plot the voltage that is lost along the way of a circuit, post by post, in each operating condition."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from checker.boat.hull import Circuit
from checker.network.flow import Flow
from checker.network.graph import EdgeKind
from checker.network.studies import Studies
from checker.output.drawing.canvas import LINE, THICK, Canvas
from checker.output.drawing.paths import Way
from checker.output.drawing.plot import (
    DASHES,
    LANE,
    LETTERS,
    TICKS,
    Axis,
    Frame,
    labels_above,
    labels_below,
    round_step,
)

WIDE = 190.0
_LEFT, _FRAME_WIDE = 56.0, 82.0
_TITLE, _ROW = 15.0, 4.2
_DRAWN = (EdgeKind.CONDUCTOR, EdgeKind.BOND, EdgeKind.DEVICE, EdgeKind.CONTACT, EdgeKind.SHUNT, EdgeKind.DIODE)
_SAME_V = 0.0005
"""Lines that lie closer than this everywhere are one line."""
_LEAST_A = 0.001
"""Below this a circuit is at rest."""


@dataclass(frozen=True, slots=True)
class _Profile:
    """Hold what is lost up to each row in one condition, V, and the voltage between the circuit's two ends there."""

    condition: str
    lost_v: tuple[float, ...]
    left_v: float


def voltage_plot(
    studies: Studies, circuit: Circuit, way: Way, hull: str, limits: Mapping[str, float] | None = None
) -> str | None:
    """Return the plot of a circuit's way out and back as SVG, or None where no condition sends a current along it.

    Args:
        studies: Of the boat; conditions are taken with full batteries.
        circuit: The circuit.
        way: Its way.
        hull: The hull's id.
        limits: The share of the nominal voltage that may be lost from the bank, by what asks for it.
    """
    if studies.conditions.missing:
        return None  # without a battery's figures nothing here would be true
    profiles = [
        _profile(solved.full, solved.operation.condition.id, way)
        for solved in studies.conditions.solved
        if isinstance(solved.full, Flow) and _carries(solved.full, way)
    ]
    profiles = [profile for profile in profiles if max(map(abs, profile.lost_v)) >= _SAME_V]
    if not profiles:
        return None
    rows = list(_rows(studies, way))
    limits, nominal_v = limits or {}, _nominal_v(studies, circuit, way)
    allowed = _allowed_v(profiles, limits, nominal_v)
    curves = _alike(profiles)
    top = _TITLE + LANE * len(allowed) + 3
    axis = _axis([v for profile in profiles for v in profile.lost_v] + list(allowed))
    frame = Frame(_LEFT, top, _FRAME_WIDE, _ROW * (len(rows) - 1), axis, Axis(0, len(rows) - 1, False))
    canvas = Canvas()
    _title(canvas, studies, circuit, way, hull)
    asked = [f"{fraction * 100:g} % of {nominal_v:g} V by {name}" for name, fraction in sorted(limits.items())]
    note = "each row is a post, with the part that leads to it" + "".join(f"; limit: {words}" for words in asked)
    canvas.text(3, 13.2, note, LETTERS, within=WIDE - 6)
    frame.draw_across(canvas, "V lost")
    for number, words in enumerate(rows):
        canvas.text(_LEFT - 2, frame.y + number * _ROW + 0.8, words, LETTERS, within=_LEFT - 5, anchor="end")
    for number, curve in enumerate(curves):
        points = [(lost_v, len(rows) - 1 - row) for row, lost_v in enumerate(curve[0].lost_v)]
        frame.line(canvas, points, width=THICK if number % 2 == 0 else LINE, dash=DASHES[number % len(DASHES)])
    above = [_draw_limit(canvas, frame, volts, words) for volts, words in sorted(allowed.items())]
    frame.border(canvas)
    labels_above(canvas, above, frame.y, WIDE - 3)
    labels_below(canvas, [_label(frame, curve, len(rows)) for curve in curves], frame.bottom + TICKS, WIDE - 3)
    told = [f"Voltage lost from bank {way.bank} along {circuit.name} and back."]
    told += [f"{words}." for _, words in (_label(frame, curve, len(rows)) for curve in curves)]
    told += [f"Limit: {words}." for words in asked]
    high = frame.bottom + TICKS + LANE * (len(curves) + 1)
    return canvas.svg(WIDE, high, f"Voltage along {circuit.id} on {hull}", told)


def _carries(flow: Flow, way: Way) -> bool:
    """Tell whether a current flows at the far end of a way."""
    last = next((edge for edge, _ in reversed(way.out) if edge.kind in _DRAWN), None)
    return last is not None and abs(flow.currents_a.get(last.index, 0.0)) >= _LEAST_A


def _title(canvas: Canvas, studies: Studies, circuit: Circuit, way: Way, hull: str) -> None:
    canvas.text(3, 5.5, f"{circuit.id} {circuit.name}: voltage lost along its way, {hull}", 3.0, within=WIDE - 6,
                is_bold=True)  # fmt: skip
    words = f"from {studies.network.posts[way.bank_post]} of bank {way.bank} to {studies.network.posts[way.far_post]}"
    back = " and back" if way.back else "; its way back is not known"
    canvas.text(3, 9.5, f"{words}{back}; batteries full", LETTERS, within=WIDE - 6)


def _steps(way: Way) -> Iterator[tuple[str, int, bool]]:
    """Yield each part on the way that is drawn, the post that it leads to, and whether that is on the way back."""
    for steps, is_back in ((way.out, False), (way.back, True)):
        for edge, post in steps:
            if edge.kind in _DRAWN:
                yield edge.part, post, is_back


def _rows(studies: Studies, way: Way) -> Iterator[str]:
    posts = studies.network.posts
    yield posts[way.bank_post]
    was_back = False
    for part, post, is_back in _steps(way):
        if is_back and not was_back:
            device = studies.boat.device_of(posts[way.turn_post])
            yield f"{device.id if device is not None else ''} > {posts[way.turn_post]}"
            was_back = True
        yield f"{part} > {posts[post]}"


def _profile(flow: Flow, condition: str, way: Way) -> _Profile:
    """Return what is lost from the bank's post to each row, out and back."""
    top_v, far_v = flow.voltage(way.bank_post), flow.voltage(way.far_post)
    turn_v = flow.voltage(way.turn_post) if way.back else 0.0
    lost = [0.0]
    was_back = False
    for _, post, is_back in _steps(way):
        if is_back and not was_back:
            lost.append(top_v - far_v)
            was_back = True
        lost.append(top_v - far_v + turn_v - flow.voltage(post) if is_back else top_v - flow.voltage(post))
    return _Profile(condition, tuple(lost), far_v - turn_v)


def _alike(profiles: Sequence[_Profile]) -> list[list[_Profile]]:
    """Gather the conditions whose lines cannot be told apart."""
    found: dict[tuple[int, ...], list[_Profile]] = {}
    for profile in profiles:
        found.setdefault(tuple(round(v / _SAME_V) for v in profile.lost_v), []).append(profile)
    return list(found.values())


def _axis(volts: Sequence[float]) -> Axis:
    low, high = min(0.0, *volts), max(0.0, *volts)
    step = round_step(max(high - low, _SAME_V) / 6)
    # A hair beyond a step is no reason for a whole step more.
    first, last = math.floor(low / step + 0.02), math.ceil(high / step - 0.02)
    return Axis(step * min(first, 0), step * max(last, 1), False)


def _nominal_v(studies: Studies, circuit: Circuit, way: Way) -> float:
    """Return a circuit's nominal voltage: as written, else its load's, else the boat's."""
    if circuit.voltage_v is not None:
        return circuit.voltage_v
    loads = studies.network.loads
    return next((tie.voltage_v for tie in loads if tie.feed == way.far_post), studies.boat.system_voltage_v)


def _allowed_v(profiles: Sequence[_Profile], limits: Mapping[str, float], nominal_v: float) -> dict[float, str]:
    """Return the limits in volts with their words; on the side of zero on which the circuit's lines are."""
    most = max((profile.lost_v[-1] for profile in profiles), key=abs)
    sign = -1.0 if most < 0 else 1.0
    allowed = dict.fromkeys(round(sign * fraction * nominal_v, 4) for fraction in limits.values())
    return {volts: f"limit {abs(volts):.3f} V" for volts in allowed}


def _draw_limit(canvas: Canvas, frame: Frame, volts: float, words: str) -> tuple[float, str]:
    x, _ = frame.at(volts, 0)
    canvas.line([(x, frame.y), (x, frame.bottom)], width=0.7)
    return x, words


def _label(frame: Frame, curve: Sequence[_Profile], rows: int) -> tuple[float, str]:
    """Return where the line of some conditions ends, and its label."""
    first = curve[0]
    x, _ = frame.at(first.lost_v[rows - 1], 0)
    names = ", ".join(profile.condition for profile in curve)
    lost_v = first.lost_v[-1]
    words = f"{lost_v:.3f} V lost" if lost_v >= 0 else f"{-lost_v:.3f} V above the bank"
    return x, f"{words}: {names}"
