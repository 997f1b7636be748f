"""Hold the facts of parts, one frozen record a kind.

Posts are the places of a part where conductors land; nothing else can be named by a
conductor. All quantities are SI; None means that the yard did not give the figure.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace

from checker.finding import NOWHERE, Span
from checker.units import Size


@dataclass(frozen=True, slots=True, kw_only=True)
class Fittings:
    """Describe the posts of a part as an electrician meets them; None or "" where it was not recorded.

    `terminal` is how conductors are fixed: stud, screw, clamp, set-screw, blade, spring, wing-nut,
    plug or lead. `stud` is its thread. `ingress` is the rating by IEC 60529.
    """

    terminal: str = ""
    stud: str = ""
    is_covered: bool | None = None
    torque_nm: float | None = None
    smallest: Size | None = None
    largest: Size | None = None
    ingress: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitted:
    """What all parts have that conductors land on."""

    fittings: Fittings = Fittings()


@dataclass(frozen=True, slots=True, kw_only=True)
class Battery(Fitted):
    """Describe a battery: EMF and internal resistance at full and low charge."""

    id: str
    voltage_v: float
    capacity_ah: float
    chemistry: str
    emf_full_v: float | None = None
    emf_low_v: float | None = None
    resistance_full_ohm: float | None = None
    resistance_low_ohm: float | None = None
    short_circuit_a: float | None = None
    charge_voltage_v: float | None = None
    cranking_a: float | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ("pos", "neg")


@dataclass(frozen=True, slots=True)
class BandPoint:
    """Hold one point of a time-current band: the multiple of the rating, and the times it opens between, s.

    `latest_s` is infinite where the device may never open.
    """

    multiple: float
    earliest_s: float
    latest_s: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """Describe when a device opens: points in rising order of the multiple of its rating.

    `engine_space_factor` is taken on the rating of a device that stands in an engine space; None
    where it is not written, which is read as 1.
    """

    id: str
    points: tuple[BandPoint, ...]
    engine_space_factor: float | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Overcurrent(Fitted):
    """Describe a fuse or a breaker. A series holds one record for each rating it is made at."""

    id: str
    is_breaker: bool
    rating_a: float
    voltage_v: float
    interrupting_a: float | None = None
    resistance_ohm: float | None = None
    band: Band | None = None
    trip_free: bool = True
    resets_itself: bool = False
    polarised: bool = False
    ignition_protected: bool = False
    series: tuple[Overcurrent, ...] = ()
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ("line", "load")


@dataclass(frozen=True, slots=True, kw_only=True)
class Bus(Fitted):
    """Describe a bus bar, fuse block bar, panel bar or terminal stud: one electrical node.

    `studs` share terminals, up to `terminals_per_stud`; `screws` take one branch return each.
    """

    id: str
    rating_a: float
    studs: int | None = None
    terminals_per_stud: int | None = None
    screws: int | None = None
    screw_thread: str = ""
    is_splice: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ("",)


@dataclass(frozen=True, slots=True, kw_only=True)
class Metal(Fitted):
    """Describe a metal part that can carry current: engine block, tank, keel bolt, mast."""

    id: str
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ("",)


@dataclass(frozen=True, slots=True, kw_only=True)
class Switch(Fitted):
    """Describe a switch, relay or contactor by the contacts that each of its states closes."""

    id: str
    posts: tuple[str, ...]
    states: tuple[tuple[str, tuple[tuple[str, str], ...]], ...]
    by_hand: bool = True
    continuous_a: float | None = None
    intermittent_a: float | None = None
    contact_ohm: float | None = None
    ignition_protected: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Diode(Fitted):
    """Describe what conducts one way only: an isolator, a blocking diode, a one-way disconnect.

    `paths` are (anode, cathode) pairs of its posts. A path that conducts drops `drop_v` and,
    over that, its resistance times the current.
    """

    id: str
    posts: tuple[str, ...]
    paths: tuple[tuple[str, str], ...]
    drop_v: float
    resistance_ohm: float
    continuous_a: float | None = None
    ignition_protected: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Shunt(Fitted):
    """Describe a monitoring shunt: `bat` faces the bank, `sys` the boat; `vbat`, `aux` are sense posts."""

    id: str
    rating_a: float
    continuous_a: float | None = None
    short_time_a: float | None = None
    short_time_s: float | None = None
    resistance_ohm: float | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ("bat", "sys", "vbat", "aux")


@dataclass(frozen=True, slots=True, kw_only=True)
class Load(Fitted):
    """Describe a load between its feed post and its return post."""

    id: str
    voltage_v: float
    current_a: float
    peak_a: float | None = None
    min_voltage_v: float | None = None
    max_device_a: float | None = None
    standby_a: float | None = None
    model: str = "constant-current"
    duty_s: float | None = None
    is_motor: bool = False
    stall_a: float | None = None
    stall_protection: str = ""
    has_own_switch: bool = False
    is_regulator: bool = False
    case_isolated: bool | None = None
    ignition_protected: bool = False
    feed_post: str = "pos"
    return_post: str = "neg"
    case_post: str = ""
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    @property
    def posts(self) -> tuple[str, ...]:
        """Return the posts of the load."""
        return tuple(post for post in (self.feed_post, self.return_post, self.case_post) if post)


@dataclass(frozen=True, slots=True, kw_only=True)
class Terminals:
    """Describe one output or input of a source: its post, the post it returns to, and its limits."""

    post: str
    return_post: str
    max_a: float
    voltage_v: float
    limited: bool = False
    cold_open_v: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Source(Fitted):
    """Describe a charge source or converter: outputs that feed, inputs that draw, posts joined inside (ohm).

    `rated_a` is what the maker prints, below the cold maximum of an output. `enable` says what
    switches a converter on, "" where that was not recorded. `on_disconnect` says what happens
    when its battery disconnects itself: stops-first, survives, harmed.
    """

    id: str
    outputs: tuple[Terminals, ...]
    inputs: tuple[Terminals, ...] = ()
    joined: tuple[tuple[str, str, float], ...] = ()
    rated_a: float | None = None
    max_input_v: float | None = None
    has_internal_fuse: bool | None = None
    enable: str = ""
    on_disconnect: str = ""
    case_isolated: bool | None = None
    case_post: str = ""
    ignition_protected: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    @property
    def posts(self) -> tuple[str, ...]:
        """Return the posts of the source, each once, in a fixed order."""
        ends = [post for t in (*self.outputs, *self.inputs) for post in (t.post, t.return_post)]
        ends += [post for pair in self.joined for post in pair[:2]]
        return tuple(dict.fromkeys([*ends, *([self.case_post] if self.case_post else [])]))


@dataclass(frozen=True, slots=True, kw_only=True)
class Cable:
    """Describe a type of cable: its insulation and what it is made of."""

    id: str
    insulation_c: float
    material: str
    is_stranded: bool
    is_insulated: bool
    is_sheathed: bool
    cores: int = 1
    is_welding: bool = False
    core_colours: tuple[str, ...] = ()
    real_areas_mm2: tuple[tuple[str, float], ...] = ()  # by the text of a size: 6 AWG, 2.5 mm2
    at: Span = field(default=NOWHERE, compare=False, repr=False)

    posts: tuple[str, ...] = ()

    def states_area(self, size: Size) -> bool:
        """Tell whether the part states the copper area of a size."""
        return size.text in dict(self.real_areas_mm2)

    def real_size(self, size: Size) -> Size:
        """Return a size with the copper area that the part states for it, or as it is."""
        return replace(size, area_mm2=dict(self.real_areas_mm2).get(size.text, size.area_mm2))


Part = Battery | Overcurrent | Bus | Metal | Switch | Diode | Shunt | Load | Source | Cable
