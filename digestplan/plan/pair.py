"""What the library knows of one enzyme on one material."""

from dataclasses import dataclass

from digestplan import library
from digestplan.library import EnzymeEntry, KnownRunEntry, LibraryValue, MaterialEntry
from digestplan.plan.model import Environment, KnownRun, Value

_MATRIX = "demineralised-bone"  # what is left of every mineralised material


@dataclass(frozen=True, slots=True)
class Pair:
    """
    An enzyme and a material of the library, either of which a plan may leave unnamed.

    Attributes
    ----------
    enzyme, material
        Their entries.
    demineralised
        Whether the plan dissolves the mineral, so that the enzyme meets what is left.
    """

    enzyme: EnzymeEntry | None
    material: MaterialEntry | None
    demineralised: bool

    @property
    def mineralised(self) -> bool:
        """Whether the enzyme would meet mineral."""
        mineral = self.material is not None and "mineral_fraction" in self.material.values
        return mineral and not self.demineralised

    @property
    def _matrix(self) -> str:
        if self.material is None:
            return ""
        return _MATRIX if "mineral_fraction" in self.material.values else self.material.key

    @property
    def law(self) -> str:
        """The extent law of the enzyme on the material."""
        return self.enzyme.laws.get(self._matrix, "first_order") if self.enzyme else "first_order"

    @property
    def diffusivity(self) -> LibraryValue | None:
        """Diffusivity of the enzyme in the material, where it must penetrate."""
        return self.enzyme.diffusivity.get(self._matrix) if self.enzyme else None

    @property
    def known_run(self) -> KnownRun | None:
        """The run of common practice, if there is one."""
        if self.enzyme is None or self.material is None or self.mineralised:
            return None
        entry = library.known_run(self.enzyme.key, self._matrix)
        return None if entry is None else _run_of(entry)

    @property
    def lack(self) -> str:
        """Why a plan has to say itself how fast the sample gives way."""
        wanted = "(or a section [sample.known_run] in its place)"
        if self.enzyme is None or self.material is None:
            return wanted
        if self.mineralised:
            return f"{wanted}; {self.material.name} is mineralised, demineralise it first"
        names = f"{self.enzyme.name} on {self.material.name}"
        return f"{wanted}; the library has no known run of {names}"


def _run_of(entry: KnownRunEntry) -> KnownRun:
    values = {
        name: Value(known.quantity, f"sample.known_run.{name}", "library", known.source)
        for name, known in entry.values.items()
    }
    return KnownRun(
        ratio=values["ratio"],
        temperature=values["temperature"],
        duration=values["duration"],
        extent=values["extent"],
        thickness=values.get("thickness"),
        environment=Environment(ph=values.get("ph"), calcium=values.get("calcium")),
    )
