"""A new plan from a protocol of the library, and the demo plans."""

from collections.abc import Iterator
from datetime import datetime, timedelta
from importlib.resources import files
from pathlib import Path

from digestplan.problems import InputError, Problem
from digestplan.report.sheet.save import save

_DEMO = "presets_demo"


def demo_folder() -> Path:
    """Return the folder of the demo plans, installed or beside the package."""
    installed = Path(str(files("digestplan"))) / _DEMO
    return installed if installed.is_dir() else installed.parents[1] / _DEMO


def demo_plans() -> list[Path]:
    """Return the demo plans."""
    return sorted(demo_folder().glob("*.toml"))


def protocols() -> Iterator[tuple[str, str]]:
    """Yield enzyme and material of every known run of the library."""
    from digestplan import library

    for enzyme in library.keys("enzyme"):
        for material in library.keys("material"):
            if library.known_run(enzyme, material) is not None:
                yield enzyme, material


def new_plan(enzyme: str, material: str, now: datetime) -> str:
    """
    Return the text of a new plan after a protocol of the library.

    Parameters
    ----------
    enzyme, material
        Keys of the library that have a known run.
    now
        Local time; the plan starts this evening.

    Returns
    -------
    text
        TOML; mass and thickness of the piece are to be set by the user.
    """
    from digestplan import library

    run = library.known_run(enzyme, material)
    assert run is not None
    values = {name: value.text for name, value in run.values.items()}
    tomorrow = now.date() + timedelta(days=1)
    ratio = run.values["ratio"].quantity
    label = library.enzyme(enzyme).values.get("label_activity")
    lot = ""
    if ratio.activity not in {None, "mg"} and label is None:
        lot = f'label_activity = "100 {ratio.activity}/mg"   # as on the bottle\n'
    ph = f"ph = {run.values['ph'].quantity.value:g}\n" if "ph" in values else ""
    return (
        f"digestplan = 1\n"
        f'title = "{library.material(material).name} with {library.enzyme(enzyme).name}"\n'
        f"start = {now.date()}T17:30:00\n"
        f'visits = ["{tomorrow}T08:30 / {tomorrow}T17:00"]\n\n'
        f'[sample]\nmaterial = "{material}"\n'
        f'wet_mass = "100 mg"      # weigh yours\n'
        f'thickness = "1 mm"       # measure yours\n\n'
        f'[lot]\nenzyme = "{enzyme}"\n{lot}\n'
        f'[[steps]]\ndo = "digest"\n'
        f'ratio = "{_middle(values["ratio"])}"\nvolume = "2 mL"\n{ph}'
        f'temperature = "{_middle(values["temperature"])}"\nfor = "{_middle(values["duration"])}"\n'
    )


def _middle(text: str) -> str:
    """Return a value without its spread."""
    for sign in (" x/", " ×/", " ± ", " +/- "):
        head, found, tail = text.partition(sign)
        if found:
            unit = (
                ""
                if any(c.isalpha() for c in head) or ":" in head
                else " " + tail.partition(" ")[2]
            )
            return head.strip() + unit
    return text


def copy_demo(folder: str | None) -> tuple[Path, list[Path]]:
    """
    Copy the demo plans, with their lots and readings; files that are there already are kept.

    Parameters
    ----------
    folder
        Where to; None for ``digestplan-demo`` in the current folder.

    Returns
    -------
    folder, files
        Where they are, and all that belong to the demo.
    """
    target = Path(folder or "digestplan-demo").expanduser()
    files_there = []
    try:
        target.mkdir(parents=True, exist_ok=True)
        for file in sorted(p for p in demo_folder().iterdir() if p.is_file()):
            copy = target / file.name
            if not copy.exists():
                save(copy, file.read_bytes())
            files_there.append(copy)
    except OSError as error:
        told = f"the demo cannot be copied here: {error.strerror}"
        raise InputError(Problem("", told, str(target))) from None
    return target, files_there
