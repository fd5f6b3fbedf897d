"""Measure what solving costs and write TABLE.md: seconds, cycles, memory, and the time to a given accuracy.

    python -m validation.timing.measure [PART ...]     parts by name (see PARTS); the others keep what they had

Ratios within one run are what to compare: seconds are of the machine of that run, whose memory bandwidth and load stand
beside them. Processor seconds are of one core; a shared machine makes wall seconds longer.
"""

import os
import platform
import resource
import statistics
import subprocess
import sys
import tempfile
import time
import tracemalloc
from collections.abc import Callable
from datetime import date
from pathlib import Path

import numba
import numpy as np

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.case.write import to_toml
from axicfd.mesh.build import family
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.solver.solve import solve_on
from validation.robustness.cases import HOT, band, flow_cases, heated
from validation.timing import flows, heats, sweeps

HERE = Path(__file__).parent
REPEATS = 5
SIZES = 10_000, 40_000, 160_000, 640_000
RIVAL_SIZES = 2_500, 10_000, 40_000
CAP = 40.0  # seconds that a slower way gets at most, of the processor
TRIAD = 20_000_000  # numbers per array: far outside the caches
WITHIN = 1e-3  # of the scale, for the time to accuracy
MESHES = 600, 1_250, 2_500, 5_000, 10_000, 20_000, 40_000


def developing() -> Case:
    # judged by its pressure drop: nothing else than friction would heat it
    return flow_cases()["flow, Re 100, L/D 20"].replace({"physics.viscous_heating": False})


def conjugate() -> Case:
    return heated(band('heat = "20 W"'), 50, 100, exponent=0.0, thickness=1.0)


def falling() -> Case:
    return heated([("tube", 1000, HOT)], 100)


PROBLEMS = {
    "developing flow, Re 100": developing,
    "steel tube with a heater band, Re 50, constant properties": conjugate,
    "viscosity falling twentyfold, heated through a film, Re 100": falling,
}


@numba.njit
def _triad(a, b, c):
    for i in range(len(a)):
        a[i] = b[i] + 3.0 * c[i]


def bandwidth() -> float:
    """[GB/s] of a = b + 3 c over long arrays, on one core; three arrays count, best of five."""
    a, b, c = (np.ones(TRIAD) for _ in range(3))
    _triad(a, b, c)
    return 24.0 * TRIAD / min(wall(lambda: _triad(a, b, c)) for _ in range(5)) / 1e9


def wall(run: Callable[[], object]) -> float:
    begun = time.perf_counter()
    run()
    return time.perf_counter() - begun


def medians(run: Callable[[], object], repeats: int = REPEATS) -> tuple[float, float]:
    """Wall and processor seconds of a run, medians; it is run once before."""
    run()
    pairs = []
    for _ in range(repeats):
        clock, processor = time.perf_counter(), time.process_time()
        run()
        pairs.append((time.perf_counter() - clock, time.process_time() - processor))
    return statistics.median(p[0] for p in pairs), statistics.median(p[1] for p in pairs)


def sized(case: Case, cells: int) -> Case:
    return case.replace({"mesh.at_most": cells})


# ---------------------------------------------------------------------- parts


def part_flow() -> list[str]:
    """Flow to 1e-8 from nothing, all coarser meshes included."""
    rows, points = [], []
    speed = bandwidth()
    for size in SIZES:
        case = sized(developing(), size)
        flows.climb(case)
        taken = [flows.climb(case) for _ in range(REPEATS if size < 600_000 else 3)]
        seconds = statistics.median(t[0].seconds for t in taken)
        processor = statistics.median(t[0].processor for t in taken)
        took, flow, counts = taken[-1]
        cells = flow.mesh.nz * flow.mesh.nr
        points.append((cells, processor))
        rows.append(
            f"| {cells} | {took.iterations} | {', '.join(map(str, counts))} | {seconds:.2f} | {processor:.2f} | "
            f"{processor / cells * 1e6:.1f} | {processor / cells * speed * 1e9 / 8:.0f} |"
        )
    x, y = np.log(np.array(points)).T
    growth = float(np.polyfit(x, y, 1)[0])
    return [
        "Developing flow (flat inlet, Re 100, 20 diameters) to 1e-8, climb over five nested meshes included, "
        "compilation not. "
        f"Triad bandwidth of the run: {speed:.1f} GB/s. Processor seconds grow like cells to the power {growth:.2f}.",
        "",
        "| cells | cycles, finest | cycles on each mesh | s | processor s | µs per cell "
        "| numbers the triad moves meanwhile, per cell |",
        "|---|---|---|---|---|---|---|",
        *rows,
    ]


def part_rivals() -> list[str]:
    """Multigrid, SIMPLEC, SIMPLE and Newton from the same start on the same mesh."""
    rows = []
    for size in RIVAL_SIZES:
        case = sized(developing(), size)
        grid = family(case, layout(case)).grid(0)
        own = 0.0
        for way in (flows.multigrid, flows.simplec, flows.simple, flows.newton):
            repeats = REPEATS if way is flows.multigrid else 1
            took = sorted((way(case, grid, CAP) for _ in range(repeats)), key=lambda t: t.processor)[repeats // 2]
            own = took.processor if way is flows.multigrid else own
            end = "" if took.residual <= flows.STOP_BELOW else f" (stopped at {took.residual:.0e})"
            rows.append(
                f"| {grid.cells} | {way.__name__} | {took.iterations}{end} | {took.seconds:.2f} "
                f"| {took.processor:.2f} | {took.processor / own:.0f} |"
            )
    return [
        "The same flow on one mesh, all from the developed profile everywhere, to 1e-8. Newton's Jacobian comes from "
        "coloured differences, its system is solved by a sparse LU. A way that takes longer than "
        f"{CAP:.0f} s is stopped after the iteration it is in.",
        "",
        "| cells | way | iterations | s | processor s | times multigrid |",
        "|---|---|---|---|---|---|",
        *rows,
    ]


def part_memory() -> list[str]:
    """Peak of all arrays while one mesh is solved."""
    rows = []
    for name, make in PROBLEMS.items():
        for size in (40_000, 160_000):
            case = sized(make(), size)
            meshes = family(case, layout(case))
            start = solve_on(case, meshes.grid(1))
            grid = meshes.grid(0)
            tracemalloc.start()
            solve_on(case, grid, start)
            peak = tracemalloc.get_traced_memory()[1]
            tracemalloc.stop()
            rows.append(f"| {name} | {grid.cells} | {peak / grid.cells:.0f} |")
    return [
        "Peak of all arrays during the solve of the finest mesh (flow, heat, both multigrids, the vectors of GMRES):",
        "",
        "| problem | cells | bytes per cell |",
        "|---|---|---|",
        *rows,
    ]


def part_heat() -> list[str]:
    """Steps of the heat solver over the ranges of its parameters."""
    rows = []
    for name, case in heats.cases().items():
        steps, cells, thin, thick = heats.steps(case)
        rows.append(f"| {name} | {cells} | {thin:.2g} to {thick:.2g} | {steps} |")
    return [
        "Steps of GMRES with one multigrid cycle each, for eight digits of the linear heat system of a tube with a "
        "heater band "
        "(developed flow; where not varied: conductivity ratio 80, wall a fifth of the radius, Péclet number 5000):",
        "",
        "| varied | cells | dz/dr of its cells | steps |",
        "|---|---|---|---|",
        *rows,
    ]


def headline(result: Result) -> dict[str, tuple[float, float]]:
    """(value, scale) of outlet temperature, pressure drop, heat gain and the hottest wetted wall of the stream.

    Temperatures are judged against the largest temperature difference of the solution, heat against the largest heat.
    """
    (stream,) = result.summary["stream"].values()
    span = float(np.abs(result.fields["T"]).max())
    kelvins = {key: (stream[key], span) for key in ("outlet_temperature_K", "hottest_wetted_wall_K")}
    own = {key: (stream[key], abs(stream[key])) for key in ("pressure_drop_Pa", "heat_gain_W")}
    return {key: pair for key, pair in (kelvins | own).items() if pair[0] is not None and pair[1] > 0.0}


def part_accuracy() -> list[str]:
    """Seconds until every headline quantity is within 0.1 % of the limit of fine meshes."""
    rows = []
    for name, make in PROBLEMS.items():
        truth = headline(solve(make(), halvings=1))
        truth = {q: pair for q, pair in truth.items() if not (q == "heat_gain_W" and abs(pair[0]) < 1e-9)}
        done = False
        for size in MESHES:
            case = sized(make(), size)
            found = headline(solve(case))
            worst, which = max((abs(found[q][0] - truth[q][0]) / truth[q][1], q) for q in truth)
            good = worst <= WITHIN
            chosen = size == MESHES[-1]
            if not (good and not done) and not chosen:
                continue
            seconds, processor = medians(lambda case=case: solve(case))
            note = ["the first within 0.1 %"] if good and not done else []
            note += ["the tool's choice"] if chosen else []
            cells = solve(case).summary["cells"]
            rows.append(
                f"| {name} | {cells} | {100 * worst:.4f} % ({which}) | {seconds:.2f} | {processor:.2f} "
                f"| {', '.join(note)} |"
            )
            done = done or good
    return [
        "Whole solves with mesh errors. The truth is the value extrapolated from meshes of up to 160 000 cells. "
        "Quantities: outlet temperature, pressure drop, heat gain, hottest wetted wall; temperatures as shares of the "
        "largest temperature difference.",
        "",
        "| problem | cells | largest error | s | processor s | |",
        "|---|---|---|---|---|---|",
        *rows,
    ]


def part_start() -> list[str]:
    """From the shell to a solved case, with an empty and with a full cache of compiled kernels."""
    rows = []
    with tempfile.TemporaryDirectory() as folder:
        environment = os.environ | {"NUMBA_CACHE_DIR": folder}
        environment.pop("PYTHONDONTWRITEBYTECODE", None)  # a user's Python keeps its compiled modules
        path = Path(folder) / "conjugate.toml"
        path.write_text(to_toml(sized(conjugate(), 10_000)), encoding="utf-8")
        words = ["solve", str(path), "--replace", "--out", str(Path(folder) / "results")]

        def start() -> tuple[float, float]:
            before = resource.getrusage(resource.RUSAGE_CHILDREN)
            seconds = wall(
                lambda: subprocess.run(
                    [sys.executable, "-m", "axicfd", *words],
                    check=True,
                    env=environment,
                    cwd=HERE.parents[1],
                    capture_output=True,
                )  # fmt: skip
            )
            after = resource.getrusage(resource.RUSAGE_CHILDREN)
            return seconds, after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime

        rows.append("| first ever | {:.1f} | {:.1f} |".format(*start()))
        again = [start() for _ in range(REPEATS)]
        medians_ = [statistics.median(column) for column in zip(*again, strict=True)]
        rows.append("| again, median of {} | {:.1f} | {:.1f} |".format(REPEATS, *medians_))
    return [
        "`axicfd solve` in a new process: the conjugate problem on 10 000 cells, with mesh errors, results folder and "
        "printed answer:",
        "",
        "| start | s | processor s |",
        "|---|---|---|",
        *rows,
    ]


def part_sweep() -> list[str]:
    """Many variants: what handing out, keeping and starting processes cost."""
    case = sized(conjugate(), 10_000)
    with tempfile.TemporaryDirectory() as folder:
        found = sweeps.rates(sweeps.plan_of(case, "section.band.outside.heat", "5 W", "40 W", Path(folder)))
    rows = []
    for name, turns in found.items():
        wall, processor = (statistics.median(turn[i] for turn in turns) for i in range(2))
        rows.append(f"| {name} | {wall:.1f} | {processor:.1f} | {sweeps.ROWS / wall:.2f} |")
    one, two, plain = (statistics.median(turn[0] for turn in turns) for turns in found.values())
    return [
        f"{sweeps.ROWS} variants of the conjugate problem on 10 000 cells, each in full with its mesh errors, start of "
        f"the processes included; medians of {sweeps.TURNS} turns of two workers and of two plain processes, by turns.",
        "",
        "| run | s | processor s | rows per s |",
        "|---|---|---|---|",
        *rows,
        "",
        f"Rate of two workers over that of one: {one / two:.2f}; over that of two plain processes: {plain / two:.2f}.",
    ]


PARTS: dict[str, tuple[str, Callable[[], list[str]]]] = {
    "flow": ("Flow: cost against cells", part_flow),
    "rivals": ("Flow: against other ways", part_rivals),
    "heat": ("Heat: steps", part_heat),
    "memory": ("Memory", part_memory),
    "accuracy": ("Time to accuracy", part_accuracy),
    "start": ("Start", part_start),
    "sweep": ("Many variants", part_sweep),
}


def main(words: list[str]) -> int:
    (HERE / "parts").mkdir(exist_ok=True)
    for name, (title, part) in PARTS.items():
        if words and name not in words:
            continue
        before = os.getloadavg()[0]
        lines = part()
        after = os.getloadavg()[0]
        load = f"Load of the {os.cpu_count()} cores meanwhile: {before:.1f} to {after:.1f}. {date.today().isoformat()}."
        (HERE / "parts" / f"{name}.md").write_text(
            "\n".join([f"## {title}", "", *lines, "", load, ""]), encoding="utf-8"
        )
        print(f"{title}: done", flush=True)
    written = [HERE / "parts" / f"{name}.md" for name in PARTS]
    head = [
        "# What solving costs",
        "",
        f"Written by `python -m validation.timing.measure`; {platform.machine()}, Python {platform.python_version()}, "
        f"medians of {REPEATS} where not said otherwise.",
        "",
    ]
    body = [path.read_text(encoding="utf-8") for path in written if path.exists()]
    (HERE / "TABLE.md").write_text("\n".join(head + body), encoding="utf-8")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
