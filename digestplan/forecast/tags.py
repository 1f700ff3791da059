"""What a step brings together, as tags that the table of cautions asks for."""

from digestplan import library
from digestplan.plan.model import Demineralise, Digest, Hold, Plan, Rinse, Step, Stop

ACIDIC = 4.0  # pH below which a liquid counts as acid
_WORDS = {
    "azide": ("azide",),
    "hypochlorite": ("hypochlorite", "bleach"),
    "ammonia": ("ammonia", "ammonium hydroxide"),
    "organic": ("alcohol", "ethanol", "methanol", "propanol", "acetone", "xylene", "ether"),
    "formaldehyde": ("formaldehyde", "formalin", "formol"),
    "hydrochloric": ("hydrochloric",),
    "nitric": ("nitric",),
    "formic": ("formic",),
    "acetic": ("acetic acid", "vinegar"),
    "acid": ("acid",),
    "phosphate": ("phosphate", "pbs"),
    "edta": ("edta", "edetate"),
    "citrate": ("citrate", "citric"),
    "calcium": ("calcium",),
    "amine": ("tris",),
    "thiol": ("dithiothreitol", "mercaptoethanol", "cysteine", "glutathione", "thiol"),
    "serine-inhibitor": ("sulfonyl fluoride", "pmsf", "organophosph", "fluorophosph"),
}


def tags_of(step: Step, plan: Plan) -> frozenset[str]:
    """
    Return what a step brings together.

    Parameters
    ----------
    step
        The step.
    plan
        The plan, for its enzyme.

    Returns
    -------
    tags
        Such as ``acid``, ``azide`` or ``calcium-enzyme``.
    """
    if isinstance(step, Demineralise):
        return _of_reagent(step.reagent)
    if isinstance(step, Rinse):
        return _in_words(step.fluid)
    if isinstance(step, Stop):
        found = set(_in_words(step.agent or ""))
        if step.how == "acidify":
            found.add("acid")
        return frozenset(found)
    if isinstance(step, Digest):
        return _of_digest(step, plan)
    assert isinstance(step, Hold)
    return frozenset()


def is_plain_rinse(step: Step) -> bool:
    """Whether a step only washes out what was there before."""
    return isinstance(step, Rinse) and not _in_words(step.fluid)


def _in_words(text: str) -> frozenset[str]:
    lower = text.lower()
    return frozenset(tag for tag, words in _WORDS.items() if any(word in lower for word in words))


def _of_reagent(key: str) -> frozenset[str]:
    reagent = library.reagent(key)
    if reagent.chelator:
        return frozenset({"edta"})
    return _in_words(reagent.name) | {"acid"}


def _of_digest(step: Digest, plan: Plan) -> frozenset[str]:
    liquid = step.environment
    found = set(_of_enzyme(plan))
    if liquid.buffer is not None:
        found |= _in_words(liquid.buffer)
    if liquid.calcium is not None and liquid.calcium.quantity.value > 0:
        found.add("calcium")
    for name, value in liquid.solutes.items():
        if value.quantity.value > 0:
            found |= _in_words(name)
    if liquid.ph is not None and liquid.ph.quantity.value < ACIDIC:
        found.add("acid")
    return frozenset(found)


def _of_enzyme(plan: Plan) -> set[str]:
    if plan.enzyme.key is None:
        return set()
    entry = library.enzyme(plan.enzyme.key)
    found = set()
    if entry.disulfide and not entry.thiol:
        found.add("disulfide-enzyme")
    if entry.metal:
        found.add("metal-enzyme")
    return found
