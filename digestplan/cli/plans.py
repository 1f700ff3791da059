"""The plan that a command is given, with what the register knows of its lot."""

import argparse

from digestplan.plan.model import Plan


def plan_of(chosen: argparse.Namespace) -> Plan:
    """
    Read the plan of a command.

    Parameters
    ----------
    chosen
        The command's arguments, ``plan`` and ``register`` among them.

    Returns
    -------
    plan
        Complete. The register is opened only where the plan names a lot and leaves its label or
        what is left of it open.
    """
    from digestplan.plan.lot import asks_register
    from digestplan.plan.read import read_plan

    plan = read_plan(chosen.plan)
    if not asks_register(plan):
        return plan
    from digestplan.forecast.from_register import with_register
    from digestplan.lots.register import open_register

    with open_register(chosen.register, create=False) as register:
        return with_register(plan, register)
