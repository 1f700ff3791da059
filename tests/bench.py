"""How fast the forecast is, as ratios measured side by side: ``python -m tests.bench``.

Nothing here is asserted: absolute times depend on the machine, ratios much less so.
"""

import os
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import numpy as np

from digestplan.forecast.conditions import draw_enzyme
from digestplan.forecast.draws import Draws
from digestplan.forecast.run import forecast, prepare
from digestplan.forecast.steps.base import untouched
from digestplan.forecast.steps.digest import advance
from digestplan.kinetics.temperature import arrhenius_factor
from digestplan.plan.read import parse_plan, read_plan

FIVE_STEPS = Path(__file__).parents[1] / "presets_demo" / "seal-rib-edta.toml"
DEMO = Path(__file__).parents[1] / "presets_demo" / "porpoise-tendon-overnight.toml"

PLAN = """
digestplan = 1
title = "bench"
[sample]
wet_mass = "180 mg"
substrate_fraction = "0.30"
shape = "slab"
thickness = "1.5 mm"
target_extent = 0.90
keep_loss_limit = 0.05
keep_selectivity = "150 x/ 1.5"
susceptibility = "2e-6 g/(CDU h) x/ 1.3"
[lot]
label_activity = "280 CDU/mg"
remaining = "0.82 ± 0.06"
[enzyme]
reference_temperature = "37 degC"
rate_law = "arrhenius"
activation_energy = "52 kJ/mol ± 6 kJ/mol"
inactivation_rate = "0.03 1/h x/ 1.6"
inactivation_energy = "230 kJ/mol ± 25 kJ/mol"
inactivation = "first_order"
{depth}
[[steps]]
do = "digest"
charge = "6 mg"
volume = "3 mL"
lag = "0 min"
temperature = [
  {{ at = "22 degC", for = "20 min" }},
  {{ to = "37 degC", over = "15 min" }},
  {{ at = "37 degC", for = "5 h" }},
  {{ to = "4 degC", over = "30 min" }},
  {{ at = "4 degC", for = "9 h" }},
]
"""
DEPTH = 'diffusivity = "3e-11 m**2/s x/ 2"'


def best_of(call, repeats=15):
    """Shortest of several runs, in milliseconds."""
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return 1e3 * min(times)


def plan(depth=False):
    """The bench's plan, with or without penetration."""
    return parse_plan(PLAN.format(depth=DEPTH if depth else ""), "bench.toml")


def engine(n_draws, depth=False):
    """A call that takes a course through the programme for so many draws, and its course."""
    job = prepare(plan(depth), Draws(plan(depth), n_draws, 1))
    carried = untouched(job)

    def call():
        return advance(job.plan.steps[0], job, carried)[0]

    return call


def solver_time(n_solved=24):
    """Milliseconds that a general solver takes for one draw at rtol 1e-8, and its doses."""
    from scipy.integrate import solve_ivp

    draws = Draws(plan(), 2000, 1)
    enzyme = draw_enzyme(plan(), draws)
    points = [(0, 22), (1 / 3, 22), (7 / 12, 37), (67 / 12, 37), (73 / 12, 4), (181 / 12, 4)]
    hours, celsius = np.array(points).T
    doses, start = [], time.perf_counter()
    for i in range(n_solved):
        ea, k, ed = (
            enzyme[name][i]
            for name in ("activation_energy", "inactivation_rate", "inactivation_energy")
        )

        def slope(t, y, ea=ea, k=k, ed=ed):
            temperature = np.interp(t, hours, celsius) + 273.15
            rate = arrhenius_factor(temperature, ea, 310.15)
            return [-k * arrhenius_factor(temperature, ed, 310.15) * y[0], rate * y[0]]

        end = solve_ivp(slope, (0, hours[-1]), [1.0, 0.0], rtol=1e-8, atol=1e-10, max_step=0.25)
        doses.append(end.y[1, -1])
    return 1e3 * (time.perf_counter() - start) / n_solved, np.array(doses)


def engine_over_exponentials():
    """Time of the engine over that of as many exponentials as it cannot avoid."""
    call = engine(2000)
    cells = call().cells
    moving = sum(len(nodes) for nodes in cells.nodes if len(nodes) > 1)
    bare = np.linspace(-5, 0, 2000 * (2 * len(cells.weights) + moving + cells.n_cells))
    return best_of(call, 40) / best_of(lambda: np.exp(bare), 40)


def kept_memory():
    """The same ratio in a process whose allocator does not hand memory back at every step."""
    kept = {"MALLOC_TRIM_THRESHOLD_": "100000000", "MALLOC_MMAP_THRESHOLD_": "100000000"}
    done = subprocess.run(
        [sys.executable, "-m", "tests.bench", "--ratio"],
        env={**os.environ, **kept, "MALLOC_TOP_PAD_": "50000000"},
        check=True,
        capture_output=True,
        text=True,
        cwd=DEMO.parents[1],
    )
    return float(done.stdout)


PEAK = """
import sys
from digestplan.cli.main import main
main(sys.argv[1:])
told = next(line for line in open("/proc/self/status") if line.startswith("VmHWM"))
print(told.split()[1], file=sys.stderr)
"""


def peak_memory(*arguments):
    """Peak resident memory of a fresh process, in MB (as Linux tells it)."""
    done = subprocess.run(
        [sys.executable, "-c", PEAK, *arguments], check=True, capture_output=True, text=True
    )
    return int(done.stderr.split()[-1]) / 1024


def cold(*arguments, repeats=7):
    """Shortest of several fresh processes, in milliseconds."""
    return best_of(
        lambda: subprocess.run([sys.executable, *arguments], check=True, capture_output=True),
        repeats,
    )


def line(what, value, goal):
    """Print one row."""
    print(f"{what:<62}{value:>14}   {goal}")


def main():
    """Print the table."""
    line("what", "measured", "goal")
    call = engine(2000)
    course = call()
    ms = best_of(call)
    a_draw, doses = solver_time()
    ratio = course.at_end().dose / course.starts[0].fresh
    apart = np.abs(ratio[: len(doses)] / doses - 1).max()
    line("engine, 2,000 draws", f"{ms:.2f} ms", "")
    line("solve_ivp, one draw (rtol 1e-8; 24 solved)", f"{a_draw:.1f} ms", "")
    line("engine against solve_ivp draw by draw", f"{2000 * a_draw / ms:,.0f} x", ">= 3,000 x")
    line("  largest difference of the dose between the two", f"{apart:.0e}", "")
    line(
        "engine against the exponentials that it needs",
        f"{engine_over_exponentials():.1f} x",
        "<= 3 x",
    )
    line("  the same where the allocator keeps its memory", f"{kept_memory():.1f} x", "")
    line(
        "engine with depth, slab, 2,000 draws",
        f"{best_of(engine(2000, depth=True)):.0f} ms",
        "<= 60 ms",
    )
    small, large = best_of(engine(1000)), best_of(engine(100_000), 3)
    line("engine, 100,000 draws against 1,000 (100 = linear)", f"{large / small:.0f} x", "~100 x")
    whole = plan()
    line("whole forecast, 2,000 draws", f"{best_of(lambda: forecast(whole)):.0f} ms", "")
    deep = plan(depth=True)
    line(
        "whole forecast with depth, 2,000 draws", f"{best_of(lambda: forecast(deep), 5):.0f} ms", ""
    )
    five = read_plan(FIVE_STEPS)
    digest_only = replace(five, steps=tuple(s for s in five.steps if s.do == "digest"))
    all_steps = best_of(lambda: forecast(five), 5)
    one_step = best_of(lambda: forecast(digest_only), 5)
    line("five-step plan, 2,000 draws", f"{all_steps:.0f} ms", "< 150 ms")
    line("  against its digest alone", f"{all_steps / one_step:.1f} x", "")
    imports = cold("-c", "import numpy, scipy.special, pint")
    command = cold("-m", "digestplan", "forecast", str(DEMO))
    line(
        "cold `forecast` against importing numpy, scipy.special, pint",
        f"{command / imports:.2f} x",
        "<= 2 x",
    )
    memory = peak_memory("forecast", str(DEMO))
    line("peak memory of `forecast`", f"{memory:.0f} MB", "<= 200 MB")


if __name__ == "__main__":
    if sys.argv[1:] == ["--ratio"]:
        print(engine_over_exponentials())
    else:
        main()
