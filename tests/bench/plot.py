"""Pictures of what the benchmark measured."""

from pathlib import Path

import matplotlib as mpl

mpl.use("Agg")

from matplotlib import pyplot as plt

from bench.report import Row


def growth(rows: list[Row], path: Path) -> None:
    """Seconds and peak memory against the number of vertices, both axes logarithmic, as a PNG."""
    sizes = [row["n"] for row in rows]
    figure, (times, memory) = plt.subplots(1, 2, figsize=(10, 4), layout="constrained")
    times.plot(sizes, [row["median solve s"] for row in rows], marker="o", label="solve (median)")
    times.plot(sizes, [row["numpy rows s"] for row in rows], marker="s", label="numpy: build the same rows")
    times.plot(sizes, [rows[0]["median solve s"] * n / sizes[0] for n in sizes], ls=":", label="proportional to n")
    times.set(xscale="log", yscale="log", xlabel="vertices", ylabel="seconds", title="Worker time, about 10 n edges")
    times.legend()
    memory.plot(sizes, [row["peak MiB"] for row in rows], marker="o", label="peak, one solve")
    memory.plot(sizes, [row["loaded MiB"] for row in rows], marker="s", label="kernels and graph loaded")
    memory.set(xscale="log", yscale="log", xlabel="vertices", ylabel="MiB", title="Resident memory")
    memory.legend()
    figure.savefig(path, dpi=120)
    plt.close(figure)
