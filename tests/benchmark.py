# ruff: noqa: E402 — the number of threads and the path are set before the imports
"""How quick is it? Prints a table and asserts nothing: ``python tests/benchmark.py``.

Medians of several runs in one process on one core. The yardstick is SciPy's general root finder on the same
balances, one water at a time, with residuals written down here and not taken from the engine.
"""

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")

import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path
from statistics import median
from typing import Any

ROOT = Path(__file__).resolve().parents[1]
sys.path.insert(0, str(ROOT))

import numpy as np
from scipy.optimize import root

from explorer.chemistry import System
from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.studies.corners import extremes
from explorer.studies.sweep import sweep
from explorer.studies.tolerance import tolerance
from explorer.studies.window import window

RUNS = 7
WATERS = 20_000
YARDSTICK_WATERS = 60
TILES = ("ph", "ccpp", "alkalinity", "si_calcite", "larson_ratio", "conductivity", "free_chlorine", "cost")
PLOTS = ("ph", "buffer_intensity", "ccpp")

TYPICAL = {
    "alkalinity": 3e-3, "dic": 3.1e-3, "calcium": 1.8e-3, "magnesium": 6e-4, "sodium": 1.5e-3,
    "potassium": 8e-5, "chloride": 1.6e-3, "sulfate": 8e-4, "nitrate": 2e-4, "fluoride": 4e-5,
    "phosphate": 3e-5, "silica": 2e-4, "boron": 5e-5, "ammonia": 3e-5, "free_chlorine": 1.4e-5,
    "monochloramine": 1e-5, "sulfite": 1e-6, "thiosulfate": 1e-6, "acetate": 1e-5, "citrate": 5e-6,
    "aluminium": 2e-6, "iron": 1e-7, "organic_carbon": 3e-4,
}  # fmt: skip
"""mol/L; every component is present."""


def timed(task: Callable[[], Any], runs: int = RUNS) -> float:
    """Median time of a task in seconds, after one run to warm up."""
    task()
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        task()
        times.append(time.perf_counter() - start)
    return median(times)


def waters(number: int) -> tuple[System, np.ndarray, np.ndarray]:
    """Waters scattered round a typical one: totals (components, number) and temperatures."""
    system = System()
    chance = np.random.default_rng(20)
    typical = np.array([TYPICAL[key] for key in system.keys])
    totals = typical[:, None] * chance.lognormal(0.0, 0.3, (typical.size, number))
    alkalinity, dic = system.index["alkalinity"], system.index["dic"]
    totals[dic] = totals[alkalinity] * chance.uniform(0.97, 1.15, number)
    return system, totals, chance.uniform(2.0, 30.0, number)


def one_by_one(system: System, totals: np.ndarray, temperature: np.ndarray) -> np.ndarray:
    """pH of each water by scipy.optimize.root over ln activities and ionic strength; nan where it fails.

    Every search starts from the answer for the typical water, which is more than the engine is given.
    """
    network = system.network
    counts, charges = network.counts, network.charges
    rows = np.array([system.index[key] for key in network.master_of])
    inert = np.array([system.index[key] for key in ("chloride", "nitrate", "thiosulfate")])
    inert_charges = np.array([1.0, 1.0, 2.0])
    typical = system.solve(np.array([TYPICAL[key] for key in system.keys]), 12.0)
    start = np.array([np.log(10) * typical.log_activity(master) for master in network.masters])
    start = np.append(start, np.log(typical.ionic_strength))
    found = np.full(temperature.size, np.nan)
    for position, celsius in enumerate(temperature):
        total = totals[:, position]
        ln_k = network.log_k(np.array(celsius))
        kelvin = celsius + 273.15
        permittivity = 87.740 - 0.40008 * celsius + 9.398e-4 * celsius**2 - 1.410e-6 * celsius**3
        slope = 1.82483e6 * np.sqrt(0.99821) * (permittivity * kelvin) ** -1.5
        groups = total[system.index["organic_carbon"]] * 10e-6 * 12.011e3
        wanted = total[rows].copy()
        wanted[0] *= -1

        def balances(
            unknown: np.ndarray, total: np.ndarray = total, ln_k: np.ndarray = ln_k, slope: float = slope,
            groups: float = groups, wanted: np.ndarray = wanted,
        ) -> np.ndarray:  # fmt: skip
            strength = np.exp(unknown[-1])
            davies = np.sqrt(strength) / (1 + np.sqrt(strength)) - 0.3 * strength
            log_gamma = np.where(charges == 0, 0.1 * strength, -slope * charges**2 * davies)
            amounts = np.exp(ln_k + counts @ unknown[:-1] - np.log(10) * log_gamma)
            ph = -unknown[0] / np.log(10)
            share, at_end = (1 / (1 + 10 ** (0.96 + 0.90 * p - 0.039 * p**2 - p)) for p in (ph, 4.5))
            held = counts.T @ amounts
            held[0] -= groups * (share - at_end)
            scale = np.maximum(np.abs(wanted), 1e-9)
            scale[0] = total[system.index["dic"]]
            ions = 0.5 * (charges**2 @ amounts + inert_charges**2 @ total[inert])
            return np.append((held - wanted) / scale, ions / strength - 1)

        answer = root(balances, start, method="hybr")
        if answer.success:
            found[position] = -answer.x[0] / np.log(10)
    return found


def plant() -> Scenario:
    """Three waters and six doses, with targets and a sweep of a share."""
    base = open_scenario(ROOT / "scenarios" / "juniper.json").to_dict()
    base["waters"][0]["train"] = []
    doses = (
        ("sodium_hypochlorite", 1.0, "mg/L as Cl2"), ("carbon_dioxide", 5.0, "mg/L"),
        ("calcium_hydroxide", 8.0, "mg/L"), ("phosphoric_acid", 1.0, "mg/L as P"),
        ("fluorosilicic_acid", 0.7, "mg/L as F"), ("sodium_hydroxide", 6.0, "mg/L"),
    )  # fmt: skip
    base["train"] = [
        {"id": f"dose{n}", "step": "dose", "chemical": c, "dose": {"value": v, "unit": u}, "price": 0.5}
        for n, (c, v, u) in enumerate(doses)
    ]
    base["sweep"] = {
        "dial": f"waters.{base['waters'][0]['id']}.share",
        "start": 0,
        "stop": 100,
        "points": 101,
    }
    base["tolerances"] = {}
    return Scenario.from_dict(base)


def redraw(scenario: Scenario) -> None:
    """What one movement of a slider asks of the server."""
    point, swept = evaluate(scenario), sweep(scenario)
    for key in TILES:
        point.readout(key)
        swept.outcome.readout(key)
    for key in PLOTS:
        swept.outcome.readout(key)
    swept.outcome.solution().family("carbonate")
    swept.outcome.reasons()


def shipped_sliders() -> Iterator[tuple[str, str]]:
    """The same for shipped scenarios in which solids, gas, floc and held doses take part."""
    for name in ("dune", "quartz", "juniper"):
        task = partial(redraw, open_scenario(ROOT / "scenarios" / f"{name}.json"))
        yield f"  the same for {name}", f"{1e3 * timed(task):.1f} ms"


def first_and_last(pictures: Callable[[], Iterator[Any]]) -> tuple[float, float]:
    """Median seconds to the first and to the last picture of a study."""
    times = []
    for _ in range(3):
        start = time.perf_counter()
        times.append([time.perf_counter() - start for _ in pictures()])
    return median(run[0] for run in times), median(run[-1] for run in times)


def studies() -> list[tuple[str, str]]:
    """Rows of the studies of two dials, of tolerances, and of holds."""
    amber, dune = (open_scenario(ROOT / "scenarios" / f"{name}.json") for name in ("amber", "dune"))
    spread = first_and_last(lambda: tolerance(amber))
    doses = ("waters.permeate.train.caustic.dose", "waters.wells.share")
    mapped = first_and_last(lambda: window(dune, *doses, (5, 25), (0, 40)))
    raw = amber.to_dict() | {"tolerances": {}}
    alum = {"value": 30, "unit": "mg/L"}
    hold = {"readout": "ph", "value": 8.2, "ceiling": {"value": 80, "unit": "mg/L"}}
    raw["train"] = [
        {"id": "alum", "step": "dose", "chemical": "aluminium_sulfate", "dose": alum},
        {"id": "caustic", "step": "dose", "chemical": "sodium_hydroxide", "hold": hold},
    ]
    held = Scenario.from_dict(raw)
    raw["train"] = [
        {"id": "gas", "step": "dose", "chemical": "carbon_dioxide", "dose": {"value": 0, "unit": "mg/L"}},
        {"id": "lime", "step": "dose", "chemical": "calcium_hydroxide", "dose": {"value": 0, "unit": "mg/L"}},
    ]
    raw["holds"] = {
        "train.gas.dose": {"readout": "ccpp", "value": 4, "high": 200},
        "train.lime.dose": {"readout": "alkalinity", "value": 300, "high": 300},
    }
    together = Scenario.from_dict(raw)
    return [
        ("tolerance: 2,048 samples of 18 inputs × 102 points, CCPP", f"{spread[1]:.2f} s"),
        ("  first picture, 64 samples", f"{spread[0]:.2f} s"),
        ("window: 129 × 129 points, 6 targets, borders", f"{mapped[1]:.2f} s"),
        ("  first picture, 33 × 33 points", f"{mapped[0]:.2f} s"),
        (
            "extremes: all corners of the strongest of 18 inputs",
            f"{timed(lambda: extremes(amber, 'ccpp'), 3):.2f} s",
        ),
        ("hold: caustic to pH 8.2 after alum, 101 blends", f"{1e3 * timed(lambda: sweep(held)):.0f} ms"),
        (
            "  lime and CO2 to alkalinity and CCPP, 101 blends",
            f"{1e3 * timed(lambda: sweep(together)):.0f} ms",
        ),
    ]


def cold_start() -> float:
    """Seconds of ``solve`` in a fresh process."""
    command = [sys.executable, "-m", "explorer", "solve", str(ROOT / "scenarios" / "amber.json"), "--json"]
    return timed(lambda: subprocess.run(command, cwd=ROOT, check=True, capture_output=True), 5)


def main() -> None:
    system, totals, temperature = waters(WATERS)
    batch = timed(lambda: system.solve(totals, temperature).ph)
    solution = system.solve(totals, temperature)
    few = slice(0, YARDSTICK_WATERS)
    start = time.perf_counter()
    singly = one_by_one(system, totals[:, few], temperature[few])
    alone = (time.perf_counter() - start) / YARDSTICK_WATERS
    solved = np.isfinite(singly)
    apart = np.max(np.abs(singly - solution.ph[few])[solved], initial=0.0)
    saturate = timed(lambda: precipitation_potential(solution), 3)
    scenario = plant()
    rows = (
        ("equilibria, every component present", f"{WATERS / batch:,.0f} a second"),
        ("  unsolved", f"{np.count_nonzero(~solution.solved)} of {WATERS:,}"),
        ("  scipy.optimize.root, one by one", f"{1 / alone:,.0f} a second"),
        ("  where that converges", f"{np.count_nonzero(solved)} of {YARDSTICK_WATERS}, pH apart {apart:.1e}"),
        ("  ratio", f"{alone * WATERS / batch:,.0f}"),
        ("CCPP", f"{WATERS / saturate:,.0f} a second"),
        (
            "slider: 3 waters, 6 doses, 101 points, tiles, plots",
            f"{1e3 * timed(lambda: redraw(scenario)):.1f} ms",
        ),
        *shipped_sliders(),
        ("evaluate alone, one point", f"{1e3 * timed(lambda: evaluate(scenario)):.2f} ms"),
        ("blendwright solve, cold start", f"{cold_start():.2f} s"),
    )
    for name, figure in (*rows, *studies()):
        print(f"{name:60}{figure}")


if __name__ == "__main__":
    main()
