"""What the table of a plan file's keys says about one key."""

from dataclasses import dataclass

RATE_LAWS = ("arrhenius", "eyring", "equilibrium", "mmrt", "q10")
INACTIVATIONS = ("first_order", "two_stage", "autolysis")
LAWS = ("first_order", "two_pool", "stretched", "michaelis_menten", "erosion")
SHAPES = ("slab", "cylinder", "sphere")
STEPS = ("demineralise", "rinse", "digest", "stop", "hold")
STOPS = ("chelate", "acidify", "alkalise", "inhibit", "heat", "chill")

# What a step may have in its liquid beside buffer and calcium.
SOLUTES = ("edta", "citrate", "phosphate", "cysteine", "inhibitor")


@dataclass(frozen=True, slots=True)
class Field:
    """One key of a section.

    Attributes
    ----------
    name
        The key.
    kind
        The kind of quantity, or ``text``, ``texts``, ``choice``, ``flag``, ``moment``, ``whole``,
        ``times``, ``temperatures``, ``table``, ``tables``, ``programme``.
    note
        What it means, in a sentence without its full stop.
    example
        How it may be written in a plan file.
    required
        Whether the section cannot do without it.
    default
        What stands in for it where neither plan nor library says; None for nothing.
    choices
        The words that are allowed.
    above, below
        Bounds in the core unit of the kind, themselves not allowed.
    most
        A bound that is itself allowed.
    exact
        Whether a spread is refused.
    """

    name: str
    kind: str
    note: str
    example: str
    required: bool = False
    default: str | None = None
    choices: tuple[str, ...] = ()
    above: float | None = None
    below: float | None = None
    most: float | None = None
    exact: bool = False


def part(
    name: str, note: str, example: str, *, required: bool = False, exact: bool = False
) -> Field:
    """Return a field for a share that is neither nothing nor everything."""
    return Field(
        name, "fraction", note, example, required=required, above=0.0, below=1.0, exact=exact
    )
