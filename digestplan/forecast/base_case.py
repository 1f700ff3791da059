"""A plan as it stands, drawn once, from which variants take what does not change."""

from math import inf

from digestplan.forecast.draws import Draws
from digestplan.forecast.passage import Passage
from digestplan.forecast.run import prepare
from digestplan.forecast.steps import run_step
from digestplan.forecast.steps.base import Carried, Job, untouched
from digestplan.forecast.variants import Main, main_of, variant_job
from digestplan.plan.model import Digest, Hold, Plan, Stop
from digestplan.problems import InputError, Problem


class BaseCase:
    """
    A plan and what its variants share: draws, enzyme, answer, and the steps before any enzyme.

    Parameters
    ----------
    job
        The plan, drawn.
    main
        Where it does most of its digesting.
    """

    def __init__(self, job: Job, main: Main) -> None:
        self.job, self.main = job, main
        enzyme = [i for i, s in enumerate(job.plan.steps) if isinstance(s, Digest | Hold | Stop)]
        self.first = enzyme[0]
        self._before = self._until_enzyme(job)
        self._fewer: dict[int, BaseCase] = {}

    def _until_enzyme(self, job: Job) -> Carried:
        carried = untouched(job)
        for index, step in enumerate(job.plan.steps[: self.first]):
            _, carried = run_step(step, index, job, carried, open_ended=False)
        return carried

    def passage(self, plan: Plan, until: float = inf) -> Passage:
        """
        Return the way of a variant.

        Parameters
        ----------
        plan
            Differs from the plan in its steps alone, from the first with enzyme on.
        until
            Steps that start later than this are left out. [h]

        Returns
        -------
        passage
            On the draws that a forecast of the variant has.
        """
        job = variant_job(self.job, plan)
        before = self._before
        if self.first and len(job.draws.inputs) != len(self.job.draws.inputs):
            before = self._until_enzyme(job)  # an input less, and those behind it move up
        return Passage(job, before, self.first, until)

    def fewer(self, n_draws: int) -> "BaseCase":
        """Return the same with the first of its draws alone."""
        if n_draws >= self.job.draws.n_draws:
            return self
        if n_draws not in self._fewer:
            draws = Draws(self.job.plan, n_draws, self.job.draws.seed)
            self._fewer[n_draws] = BaseCase(prepare(self.job.plan, draws), self.main)
        return self._fewer[n_draws]


def base_case(plan: Plan, n_draws: int, seed: int) -> BaseCase:
    """
    Draw a plan for comparisons.

    Parameters
    ----------
    plan
        The plan; without a digest step an `InputError` says that there is nothing to compare.
    n_draws, seed
        As for a forecast.

    Returns
    -------
    base
        The plan as it stands.
    """
    main = main_of(plan, seed)
    if main is None:
        message = "this plan has no digest step, so that there is nothing to compare"
        raise InputError(Problem("steps", message, plan.path))
    return BaseCase(prepare(plan, Draws(plan, n_draws, seed)), main)
