"""A plan in memory: frozen records, every value with where it was set and who says so.

What the plan file leaves open is already filled from the library here, so that the rooms above
see one kind of value only.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import datetime
from typing import Literal

from digestplan.quantities.model import Quantity

Origin = Literal["plan", "library", "lot", "default"]
Shape = Literal["slab", "cylinder", "sphere"]


@dataclass(frozen=True, slots=True)
class Value:
    """One resolved value: its quantity, its place, where it was set and who says so.

    Attributes
    ----------
    quantity
        The value with its spread, in the core unit of its kind.
    place
        Dotted name of the value in a plan file, such as ``enzyme.activation_energy``.
    origin
        ``plan``, ``library``, ``lot`` or ``default``.
    source
        The citation of the library's value; ``written in the plan`` for the user's own.
    """

    quantity: Quantity
    place: str
    origin: Origin
    source: str


@dataclass(frozen=True, slots=True)
class Environment:
    """What of the liquid acts on the rate; a value left at None counts as 1.

    ``solutes`` holds what else is in the liquid (``edta``, ``citrate``, ``phosphate``,
    ``inhibitor`` …), each as a molar concentration.
    """

    ph: Value | None = None
    ph_at: Value | None = None
    buffer: str | None = None
    buffer_concentration: Value | None = None
    calcium: Value | None = None
    solutes: Mapping[str, Value] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class KnownRun:
    """A protocol proven in the user's lab (or common practice); it sets the susceptibility."""

    ratio: Value
    temperature: Value
    duration: Value
    extent: Value
    thickness: Value | None
    environment: Environment


@dataclass(frozen=True, slots=True)
class Sample:
    """The piece of tissue: what it is, its size, what must go and what must stay.

    Exactly one of ``susceptibility`` and ``known_run`` is given. ``law_values`` holds what the
    extent law takes beside the susceptibility (``exponent``, ``fast_fraction``,
    ``slow_susceptibility``, ``half_saturation``, ``initial``). ``damage`` holds the heat damage
    of the material (``melting_enthalpy`` and ``melting_entropy``: Eyring; or
    ``melting_rate``, ``melting_energy`` and ``melting_temperature``: Arrhenius).
    """

    material: str | None
    wet_mass: Value
    substrate_fraction: Value
    shape: Shape
    thickness: Value | None
    target_extent: Value
    keep_loss_limit: Value | None
    keep_selectivity: Value | None
    law: str
    law_values: Mapping[str, Value]
    susceptibility: Value | None
    known_run: KnownRun | None
    damage: Mapping[str, Value]
    mineral_fraction: Value | None = None
    density: Value | None = None
    known_demineralisation: Mapping[str, Value | str] | None = None


@dataclass(frozen=True, slots=True)
class Lot:
    """The bottle: its label activity (None: the enzyme is counted by mass) and what is left."""

    id: str | None
    label_activity: Value | None
    remaining: Value
    conversions: Mapping[tuple[str, str], float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Enzyme:
    """The kinetics of the enzyme.

    ``values`` is keyed by the interface's names (``activation_energy``,
    ``inactivation_rate``, ``ph_low_pka`` …); a key that is absent has no effect.
    """

    key: str | None
    name: str
    rate_law: str
    inactivation: str
    values: Mapping[str, Value]
    cofactor: str | None
    cofactor_needed: bool
    measured_temperature: tuple[float, float] | None  # [K]
    ph_range: tuple[float, float] | None
    stopped_by: tuple[str, ...]
    inhibitors: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Stretch:
    """One line of a temperature programme: stay at, or go to, a temperature.

    ``hours`` is how long it lasts [h]; with ``ramp`` the bath goes there in a straight line.
    """

    temperature: Value
    hours: float
    ramp: bool


@dataclass(frozen=True, slots=True)
class Addition:
    """Fresh enzyme from the same lot, so many hours after the start of the step."""

    after: float
    charge: Value


@dataclass(frozen=True, slots=True)
class Digest:
    """A digestion: the enzyme charged, its liquid and its temperature programme.

    ``charge`` is read as ``charge_as`` says: an enzyme mass, a ratio to the substrate, or a
    concentration in ``volume``.
    """

    do: Literal["digest"]
    charge: Value
    charge_as: Literal["charge", "ratio", "concentration"]
    volume: Value | None
    environment: Environment
    programme: tuple[Stretch, ...]
    start_temperature: Value | None
    lag: Value | None
    additions: tuple[Addition, ...]


@dataclass(frozen=True, slots=True)
class Hold:
    """Waiting at a temperature, with whatever enzyme is still there."""

    do: Literal["hold"]
    programme: tuple[Stretch, ...]
    start_temperature: Value | None
    lag: Value | None


@dataclass(frozen=True, slots=True)
class Demineralise:
    """Dissolving the mineral in an acid or a chelator, with changes of the bath."""

    do: Literal["demineralise"]
    reagent: str
    concentration: Value
    volume: Value
    ph: Value | None
    changes: tuple[float, ...]  # [h]
    when_spent: Value | None
    programme: tuple[Stretch, ...]
    closed_vessel: bool
    stirred: bool


@dataclass(frozen=True, slots=True)
class Rinse:
    """Exchanges of a fluid that carry away what the step before left behind."""

    do: Literal["rinse"]
    fluid: str
    volume: Value
    exchanges: int
    each: float  # [h]
    temperature: Value


@dataclass(frozen=True, slots=True)
class Stop:
    """Ending the digestion by a chelator, acid, alkali, inhibitor, heat or cold."""

    do: Literal["stop"]
    how: str
    agent: str | None
    concentration: Value | None
    temperature: Value | None
    hours: float


Step = Digest | Hold | Demineralise | Rinse | Stop


@dataclass(frozen=True, slots=True)
class Visit:
    """A time when someone is at the bench (local wall clock)."""

    start: datetime
    end: datetime


@dataclass(frozen=True, slots=True)
class Bench:
    """What the lab has; it limits what is suggested and changes no forecast.

    Quantities, not values: what a lab has is no input of a forecast. ``incubators`` holds the
    temperatures that there are [K]; ``most_charge`` the most enzyme for one digest and ``stock``
    what there is of the lot [g]; ``programmable`` says whether a bath cools by itself.
    """

    incubators: tuple[Quantity, ...] = ()
    most_charge: Quantity | None = None
    stock: Quantity | None = None
    programmable: bool = True


@dataclass(frozen=True, slots=True)
class Plan:
    """One sample's written treatment.

    ``start`` is None where the plan gives no clock; ``activity_unit`` is the unit in which
    enzyme is counted throughout (``CDU``, ``U`` … or ``mg`` of enzyme). ``remarks`` says what the
    reader settled by itself and somebody should know.
    """

    title: str
    start: datetime | None
    visits: tuple[Visit, ...]
    confidence: float
    sample: Sample
    lot: Lot
    enzyme: Enzyme
    steps: tuple[Step, ...]
    activity_unit: str
    notes: str = ""
    path: str | None = None
    remarks: tuple[str, ...] = ()
    bench: Bench = field(default_factory=Bench)
