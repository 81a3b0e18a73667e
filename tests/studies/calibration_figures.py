"""Draws the figures of CALIBRATION.md from calibration.json.

    python tests/studies/calibration_figures.py

reliability.svg, resolution.svg and velocity.svg beside this script. Colours: Okabe & Ito 2008;
every series has a marker of its own as well.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
from kept import kept

HERE = Path(__file__).resolve().parent
BLUE, ORANGE, GREEN, BLACK = "#0072B2", "#D55E00", "#009E73", "#000000"
SETTINGS = {
    "font.size": 9, "svg.hashsalt": "calibration", "axes.spines.top": False,
    "axes.spines.right": False, "legend.frameon": False, "figure.constrained_layout.use": True,
}  # fmt: skip
SETS = (
    ("K giant, positions only", BLUE, "o"), ("K giant, with strengths", ORANGE, "s"),
    ("simulated stars", GREEN, "^"),
)
CASES = ("10000", "5000", "2000", "vsini=50", "vsini=100")
# The method document's figures (top-1, confident, agreement); None where it has none.
METHOD = {
    "Sun": {"10000": (0.957, 0.81, 0.995), "5000": (0.929, 0.79, 0.99), "2000": (0.88, 0.72, 0.95)},
    "K dwarf": {"10000": (0.924, 0.74, 0.979), "5000": (0.84, 0.73, 0.92),
                "vsini=50": (0.83, 0.71, 0.91)},
}  # fmt: skip
METHOD_VELOCITY = {"5:0.01": 0.85, "10:0.01": 1.00, "20:0.01": 1.00, "20:0.02": 1.00,
                   "20:0.05": 0.88}


def save(figure, name: str) -> None:
    figure.savefig(HERE / name, metadata={"Date": None})


def reliability(plt, data) -> None:
    """Agreement against mean probability in ten fixed bins, two standard errors as bars."""
    figure, axes = plt.subplots(1, 2, figsize=(7.4, 4.0), sharey=True)
    for axis, kind, title in zip(
        axes, ("strict", "tolerant"),
        ("named species is the main one", "main one among the contributors named"),
    ):
        x = np.linspace(0, 1, 50)
        axis.fill_between(x, x - 0.03, x + 0.03, color="0.88", lw=0, label="within 0.03")
        axis.plot(x, x, color="0.5", lw=0.8)
        for shift, (name, colour, marker) in zip((-0.006, 0.0, 0.006), SETS):
            rows = data.get(f"reliability {name}", {}).get(kind, [])
            if rows:
                mean = np.array([r["mean"] for r in rows]) + shift
                bars = [2 * max(r["binomial"], r["blocks"]) for r in rows]
                axis.errorbar(mean, [r["agreement"] for r in rows], bars, fmt=marker, ms=4.5,
                              color=colour, lw=1.0, capsize=2, label=name)
        axis.set(xlim=(0, 1), ylim=(0, 1.02), xlabel="mean probability of the bin", title=title)
        axis.set_aspect("equal", adjustable="box")
    axes[0].set_ylabel("share that was right")
    axes[1].legend(loc="lower right", fontsize=8)
    save(figure, "reliability.svg")


def resolution(plt, data) -> None:
    """Top-1, fraction confident and agreement of the degraded Sun and K dwarf."""
    figure, axes = plt.subplots(1, 3, figsize=(7.4, 3.2), sharey=True)
    labels = ["R 10,000", "R 5,000", "R 2,000", "v sin i 50", "v sin i 100"]
    for axis, key, k in zip(axes, ("top-1", "confident", "agreement"), range(3)):
        for shift, (star, colour, marker) in zip(
            (-0.12, 0.12), (("Sun", BLUE, "o"), ("K dwarf", ORANGE, "s"))
        ):
            found = data.get(f"resolution {star}", {})
            here = [i for i, c in enumerate(CASES) if c in found]
            axis.plot(np.array(here) + shift, [found[CASES[i]][key] for i in here], marker,
                      color=colour, ms=6, label=star)
            told = [(i, METHOD[star][c][k]) for i, c in enumerate(CASES) if c in METHOD[star]]
            axis.plot([i + shift for i, _ in told], [v for _, v in told], marker, ms=6,
                      mfc="none", mec=colour, label=f"{star}, prototype")
        axis.set_xticks(range(len(CASES)), labels, rotation=40, ha="right")
        axis.set_title({"agreement": "agreement when confident"}.get(key, key), fontsize=9)
        axis.set_ylim(0.4, 1.02)
        axis.grid(axis="y", color="0.9")
    axes[0].legend(fontsize=7.5, loc="lower left")
    save(figure, "resolution.svg")


def velocity(plt, data) -> None:
    """Share of blind velocities that are right, and declared, by cell."""
    from scipy.stats import beta

    cells = data.get("velocity", {})
    names = list(METHOD_VELOCITY)
    names = [n for n in names if n in cells]
    figure, axis = plt.subplots(figsize=(5.6, 3.0))
    for i, name in enumerate(names):
        cell = cells[name]
        n = cell["trials"]
        for key, colour, marker, shift in (
            ("right", BLUE, "o", -0.1), ("declared", ORANGE, "s", 0.1)
        ):
            k = cell[key]
            low = beta.ppf(0.05, k, n - k + 1) if k else 0.0
            high = beta.ppf(0.95, k + 1, n - k) if k < n else 1.0
            axis.errorbar(i + shift, k / n, [[k / n - low], [high - k / n]], fmt=marker, ms=5,
                          color=colour, capsize=2, label=key if i == 0 else None)
        axis.plot(i - 0.1, METHOD_VELOCITY[name], "_", color=BLACK, ms=14,
                  label="right, prototype (40 trials)" if i == 0 else None)
    words = ["{} features\n{} A".format(*n.split(":")) for n in names]
    axis.set_xticks(range(len(names)), words)
    axis.set(ylim=(-0.02, 1.05), ylabel="share of trials")
    axis.grid(axis="y", color="0.9")
    axis.legend(fontsize=8, loc="lower center", bbox_to_anchor=(0.5, 1.0), ncols=3)
    save(figure, "velocity.svg")


if __name__ == "__main__":
    import matplotlib

    matplotlib.use("agg")
    import matplotlib.pyplot as plt

    plt.rcParams.update(SETTINGS)
    for draw in (reliability, resolution, velocity):
        draw(plt, kept())
