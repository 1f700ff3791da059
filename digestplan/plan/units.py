"""One activity unit for a whole plan: what counts enzyme otherwise is converted, or refused.

Activity units that are defined by their own assay are never converted into each other, unless the
lot's own certificate gives the factor.
"""

from collections.abc import Mapping, Sequence
from dataclasses import replace

from digestplan.plan.model import Addition, Digest, Enzyme, Lot, Sample, Step, Value
from digestplan.plan.wording import shown
from digestplan.problems import Problems

MASS = "mg"  # the activity unit of those who count enzyme by its mass
Conversions = Mapping[tuple[str, str], float]


def activity_unit_of(sample: Sample, lot: Lot, steps: Sequence[Step | None]) -> str:
    """Return the unit in which a plan counts enzyme: that of its susceptibility or known run."""
    ratio = None if sample.known_run is None else sample.known_run.ratio
    charges = [step.charge for step in steps if isinstance(step, Digest)]
    for value in (sample.susceptibility, ratio, lot.label_activity, *charges):
        if value is not None and value.quantity.activity is not None:
            return value.quantity.activity
    return MASS


class Units:
    """
    Brings the values of a plan to its activity unit.

    Parameters
    ----------
    unit
        The plan's activity unit.
    lot
        The lot, with its label activity and the factors of its certificate.
    problems
        Where problems are noted.

    Attributes
    ----------
    left_out
        A saturation ratio of the library that could not be brought to the unit.
    """

    def __init__(self, unit: str, lot: Lot, problems: Problems) -> None:
        self.unit, self.lot, self.problems = unit, lot, problems
        self.left_out: Value | None = None

    def factor(self, unit: str) -> float | None:
        """How many of the plan's units one of another is; None where nobody says."""
        if unit == self.unit:
            return 1.0
        return self.lot.conversions.get((unit, self.unit))

    def scaled(self, value: Value, *, inverse: bool = False) -> Value | None:
        """Return a value in the plan's unit (`inverse`: it is per unit), or None."""
        unit = value.quantity.activity
        factor = 1.0 if unit is None else self.factor(unit)
        if factor is None:
            return None
        return (
            value if factor == 1.0 else _times(value, 1 / factor if inverse else factor, self.unit)
        )

    def label(self) -> Lot:
        """Return the lot as the plan counts enzyme: a count by mass needs no label activity."""
        label = self.lot.label_activity
        if label is None or self.unit == MASS:
            return replace(self.lot, label_activity=None)
        scaled = self.scaled(label)
        if scaled is None:
            self._refuse(label)
        return replace(self.lot, label_activity=scaled or label)

    def sample(self, sample: Sample) -> Sample:
        """Return the sample with its slow susceptibility in the plan's unit."""
        slow = sample.law_values.get("slow_susceptibility")
        if slow is None or (sample.susceptibility is None and sample.known_run is None):
            return sample
        scaled = self.scaled(slow, inverse=True)
        if scaled is None:
            self._refuse(slow)
            return sample
        return replace(sample, law_values={**sample.law_values, "slow_susceptibility": scaled})

    def enzyme(self, enzyme: Enzyme) -> Enzyme:
        """Return the enzyme with its saturation ratio in the plan's unit.

        The library's ratio is left out where it cannot be brought to the unit of the plan.
        """
        ratio = enzyme.values.get("saturation_ratio")
        if ratio is None:
            return enzyme
        scaled = self.scaled(ratio)
        others = {name: v for name, v in enzyme.values.items() if name != "saturation_ratio"}
        if scaled is not None:
            others["saturation_ratio"] = scaled
        elif ratio.origin == "plan":
            self._refuse(ratio)
        else:
            self.left_out = ratio
        return replace(enzyme, values=others)

    def step(self, step: Step) -> Step:
        """Return a step with what is charged in the plan's unit, or as a mass of enzyme."""
        if not isinstance(step, Digest):
            return step
        charge = self._charge(step.charge)
        additions = tuple(Addition(a.after, self._charge(a.charge)) for a in step.additions)
        return replace(step, charge=charge, additions=additions)

    def _charge(self, charge: Value) -> Value:
        unit = charge.quantity.activity
        if unit in (None, MASS) and self.unit != MASS:
            self._need_label(charge)
            return charge
        scaled = self.scaled(charge)
        if scaled is None:
            self._refuse(charge)
        return scaled or charge

    def _need_label(self, charge: Value) -> None:
        if self.lot.label_activity is not None or self.lot.id is not None:
            return  # the register tells what is on the label of a lot that it has
        place = "lot.label_activity"
        if not any(problem.place == place for problem in self.problems.found):
            message = (
                f"this is missing: {charge.place} is a mass of enzyme, and doses are in"
                f' {self.unit} here; write for instance label_activity = "280 {self.unit}/mg"'
            )
            self.problems.add(place, message)

    def _refuse(self, value: Value) -> None:
        written = value.quantity
        counted = "by its mass" if written.activity == MASS else f"in {written.activity}"
        ours = "by its mass" if self.unit == MASS else f"in {self.unit}"
        hint = f'lot.conversions = ["1 {self.unit} = … {written.activity}"] from its certificate'
        if MASS in (self.unit, written.activity):
            hint = "write it so, or give the susceptibility or the known run in the same unit"
        message = f"{shown(written.text)} counts enzyme {counted}, but this plan counts it {ours}"
        self.problems.add(value.place, f"{message}, and one is never turned into the other; {hint}")


def _times(value: Value, factor: float, unit: str) -> Value:
    q = value.quantity
    spread = q.spread * factor if q.distribution == "normal" else q.spread
    return replace(value, quantity=replace(q, value=q.value * factor, spread=spread, activity=unit))
