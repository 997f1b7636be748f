"""Plot how the devices on the way to a load act together: opening times against current, on logarithmic axes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from checker.boat.hull import Circuit, Conductor
from checker.boat.parts import Overcurrent
from checker.limits.formulas import adiabatic, adiabatic_k
from checker.network.coordination import Curve, curve_of
from checker.network.graph import EdgeKind
from checker.network.studies import Studies
from checker.output.drawing.canvas import LINE, THICK, THIN, Canvas
from checker.output.drawing.paths import Way
from checker.output.drawing.plot import DASHES, LANE, LETTERS, TICKS, Axis, Frame, labels_above, labels_below

WIDE = 190.0
_FRAME_WIDE, _FRAME_HIGH, _LEFT = 122.0, 95.0, 18.0
_TITLE = 15.0
_FILLS = ("#e4e4e4", "#f0f0f0")
_LONGEST_S = 1000.0
_SHORTEST_S = 1e-5
_WITHSTAND_DASH = "6 1 1 1 1 1"


@dataclass(frozen=True, slots=True)
class _Band:
    """Hold the band of one device as points that end at the edges of the plot."""

    device: str
    words: str
    early: tuple[tuple[float, float], ...]
    late: tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class _Fault:
    """Hold a fault current and what is said of it."""

    current_a: float
    words: str


def coordination_plot(studies: Studies, circuit: Circuit, way: Way, hull: str) -> str | None:
    """Return the plot of a circuit's path as SVG, or None where nothing on it has a time-current band.

    Shown are the bands of the devices in series, the largest fault current at each, the
    smallest at the far end, and what the thinnest conductor behind the last device withstands
    by the adiabatic equation.
    """
    curves = {name: curve_of(studies.boat, studies.boat.devices[name]) for name in way.devices}
    known = {name: curve for name, curve in curves.items() if curve.is_known}
    if not known:
        return None
    faults = _faults(studies, way)
    across = _current_axis(list(known.values()), faults)
    bands = [_band(studies, name, curve, across.high) for name, curve in known.items()]
    up = Axis(_shortest(list(known.values()), across.high), _LONGEST_S, True)
    conductor = _thinnest(studies, way)
    labels = len(bands) + (1 if conductor is not None else 0)
    top = _TITLE + labels * LANE + 3
    frame = Frame(_LEFT, top, _FRAME_WIDE, _FRAME_HIGH, across, up)
    canvas = Canvas()
    _title(canvas, studies, circuit, way, hull, [name for name in curves if name not in known])
    _fill(canvas, frame, bands)
    frame.draw_across(canvas, "current, A")
    frame.draw_up(canvas, "time, s")
    above = [_draw_band(canvas, frame, band, number) for number, band in enumerate(bands)]
    if conductor is not None:
        above.append(_draw_withstand(canvas, frame, conductor))
    below = [_draw_fault(canvas, frame, fault) for fault in faults]
    frame.border(canvas)
    labels_above(canvas, above, frame.y, WIDE - 3)
    labels_below(canvas, below, frame.bottom + TICKS, WIDE - 3)
    high = frame.bottom + TICKS + LANE * (len(below) + 1)
    told = [f"Time against current of {', '.join(known)}, in series on the way to {circuit.name}."]
    told += [f"{fault.words}." for fault in faults]
    return canvas.svg(WIDE, high, f"Coordination of {circuit.id} on {hull}", told)


def _title(canvas: Canvas, studies: Studies, circuit: Circuit, way: Way, hull: str, bandless: Sequence[str]) -> None:
    canvas.text(3, 5.5, f"{circuit.id} {circuit.name}: coordination, {hull}", 3.0, within=WIDE - 6, is_bold=True)
    words = f"from bank {way.bank} over {', '.join(way.devices)} to {studies.network.posts[way.far_post]}"
    canvas.text(3, 9.5, f"{words}; state {studies.usual.state.id}", LETTERS, within=WIDE - 6)
    note = "each device opens between the two lines of its band"
    if bandless:
        note += f"; without a band, not shown: {', '.join(bandless)}"
    canvas.text(3, 13.2, note, LETTERS, within=WIDE - 6)


def _faults(studies: Studies, way: Way) -> list[_Fault]:
    """Return the largest current at each device of a way, and the smallest at its far end."""
    if studies.without_figures:
        return []
    found: list[_Fault] = []
    levels = studies.fault_levels[0]
    for name in way.devices:
        posts = [studies.network.index[f"{name}.{end}"] for end in studies.boat.devices[name].part.posts]
        largest_a = max(levels.largest_a(post) for post in posts)
        found.append(_Fault(largest_a, f"{largest_a:.0f} A, the largest at {name}"))
    far = studies.far_ends.get(way.devices[-1])
    if far is not None:
        found.append(_Fault(far.current_a, f"{far.current_a:.0f} A, the smallest at the far end, {far.post}"))
    return [fault for fault in found if fault.current_a > 0]


def _current_axis(curves: Sequence[Curve], faults: Sequence[_Fault]) -> Axis:
    least = min([curve.corners_a()[0] for curve in curves] + [fault.current_a for fault in faults])
    most = max([curve.corners_a()[0] * 10 for curve in curves] + [fault.current_a for fault in faults])
    low, high = math.floor(math.log10(least * 0.9)), math.ceil(math.log10(most * 1.05))
    return Axis(10.0**low, 10.0 ** max(high, low + 1), True)


def _band(studies: Studies, name: str, curve: Curve, highest_a: float) -> _Band:
    part = studies.boat.devices[name].part
    assert isinstance(part, Overcurrent)
    early, late = (_edge(points, curve.rating_a, highest_a) for points in (curve.early, curve.late))
    return _Band(name, f"{name} {part.rating_a:g} A ({part.id})", early, late)


def _edge(points: Sequence[tuple[float, float]], rating_a: float, highest_a: float) -> tuple[tuple[float, float], ...]:
    """Return one edge of a band from the top of the plot to its right side; the device holds before its first time."""
    finite = [(multiple * rating_a, seconds) for multiple, seconds in points if math.isfinite(seconds)]
    if not finite:
        return ()
    return ((finite[0][0], _LONGEST_S * 10), *finite, (max(highest_a, finite[-1][0]) * 1.01, finite[-1][1]))


def _shortest(curves: Sequence[Curve], highest_a: float) -> float:
    """Return the decade under the shortest time that is shown."""
    times = [seconds for curve in curves if 0 < (seconds := curve.earliest_s(highest_a)) < math.inf]
    return min(0.1, max(_SHORTEST_S, 10.0 ** math.floor(math.log10(min(times, default=0.01)) + 1e-9)))


def _fill(canvas: Canvas, frame: Frame, bands: Sequence[_Band]) -> None:
    """Shade the bands, under everything else."""
    for number, band in enumerate(bands):
        if band.early and band.late:
            outline = [_positive(point) for point in (*band.early, *reversed(band.late))]
            frame.area(canvas, outline, _FILLS[number % len(_FILLS)])


def _positive(point: tuple[float, float]) -> tuple[float, float]:
    return point[0], max(point[1], _SHORTEST_S / 10)


def _draw_band(canvas: Canvas, frame: Frame, band: _Band, number: int) -> tuple[float, str]:
    """Draw both edges of a band; return where its label stands, and the label."""
    dash = DASHES[number % len(DASHES)]
    for edge in (band.early, band.late):
        frame.line(canvas, [_positive(point) for point in edge], width=THICK, dash=dash)
    x, _ = frame.inside(_positive(band.early[0])) if band.early else (frame.x, 0.0)
    return x, band.words


def _thinnest(studies: Studies, way: Way) -> Conductor | None:
    """Return the conductor behind the last device of a way that withstands least."""
    last = max(number for number, (edge, _) in enumerate(way.out) if edge.kind is EdgeKind.DEVICE)
    names = [edge.part for edge, _ in way.out[last + 1 :] if edge.kind is EdgeKind.CONDUCTOR]
    conductors = [studies.boat.conductors[name] for name in names]
    return min(conductors, key=lambda c: (_withstand_a(c, 1.0), c.id), default=None)


def _withstand_a(conductor: Conductor, seconds: float) -> float:
    """Return the current that a conductor withstands for a time, A: I²·t = k²·S², IEC 60364-4-43, 434.5.2."""
    final_c = adiabatic().final_c
    k = adiabatic_k(min(conductor.cable.insulation_c, final_c - 1), final_c)
    return k * conductor.copper.area_mm2 / math.sqrt(seconds)


def _draw_withstand(canvas: Canvas, frame: Frame, conductor: Conductor) -> tuple[float, str]:
    longest_s = adiabatic().valid_up_to_s
    start = (_withstand_a(conductor, longest_s), longest_s)
    end = (_withstand_a(conductor, frame.up.low), frame.up.low)
    frame.line(canvas, [start, end], width=THICK, dash=_WITHSTAND_DASH)
    x, y = frame.inside(start)
    canvas.line([(x, y), (x, frame.y)], width=THIN, dash="0.4 0.8")
    words = f"{conductor.id} {conductor.size.text} withstands, I²t = k²S², up to {longest_s:g} s"
    return x, words


def _draw_fault(canvas: Canvas, frame: Frame, fault: _Fault) -> tuple[float, str]:
    x, _ = frame.at(fault.current_a, frame.up.low)
    canvas.line([(x, frame.y), (x, frame.bottom)], width=LINE, dash="0.6 0.9")
    return x, fault.words
