"""Make the sample spectra and their truth tables.

    python sample_spectra/make_samples.py                    all, from the kept line lists
    python sample_spectra/make_samples.py g_dwarf --out DIR  one, elsewhere
    python sample_spectra/make_samples.py --redraw           line lists afresh from the catalogue

The truth tables are the line lists: made once from the catalogue of their day and kept, so
that a later catalogue neither changes the spectra nor becomes their mirror.
"""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
for _folder in (HERE, HERE.parent / "app"):
    if str(_folder) not in sys.path:
        sys.path.insert(0, str(_folder))

from studio import detector, drawing, light, nebula  # noqa: E402
from studio.files import file_bytes, keep  # noqa: E402
from studio.scenes import SCENES, Scene  # noqa: E402
from studio.truth import EMISSION, STELLAR, ecsv_text, empty, joined, read_truth  # noqa: E402

SEEN = 0.002  # lines that alone would be shallower are dropped from the list


def columns_of(scene: Scene):
    return EMISSION if scene.nebula else STELLAR


def redrawn(scene: Scene) -> tuple[dict, str]:
    """(line list from the present catalogue, the catalogue's identity)."""
    from linewright.lines.loading import load_catalogue

    catalogue = load_catalogue()
    if scene.nebula:
        return joined(nebula.draw(scene, catalogue), EMISSION), catalogue.identity
    lines = joined(drawing.draw(scene, catalogue), STELLAR)
    everywhere = {**lines, "status": np.full(len(lines["wave"]), "listed")}
    visible = light.lone_depths(scene, everywhere) >= SEEN
    return {name: values[visible] for name, values in lines.items()}, catalogue.identity


def kept(scene: Scene, folder: Path) -> tuple[dict, str]:
    """(line list of the kept truth table, identity of the catalogue it was drawn from)."""
    table, meta = read_truth(folder / f"{scene.name}_truth.ecsv")
    lines = table["origin"] != "artefact"
    chosen = {name: table[name][lines] for name, *_ in columns_of(scene)}
    return chosen, meta["catalogue"]


def exposed(scene: Scene, lines: dict) -> tuple[list, dict]:
    """(detector chips, truth table with depths and cosmic rays)."""
    rng = np.random.default_rng([scene.seed, 2])
    if scene.nebula:
        return nebula.expose(scene, lines, rng), lines
    chips = detector.chips(scene, light.received(scene, lines), rng)
    truth = {**lines, "depth": light.lone_depths(scene, lines)}
    if scene.camera.cosmic_rays:
        chips, rays = _struck(scene, chips, rng)
        truth = joined([truth, rays], STELLAR)
    return chips, truth


def _struck(scene: Scene, chips: list, rng) -> tuple[list, dict]:
    share = scene.camera.cosmic_rays // len(chips)
    struck = [detector.hit(chip, share, rng) for chip in chips]
    rays = empty(share * len(chips), STELLAR)
    rays["wave"] = np.concatenate([chip.wave[pixels] for chip, pixels, _ in struck])
    rays["depth"] = -np.concatenate([excess for *_, excess in struck])
    rays["species"][:] = "cosmic ray"
    rays["origin"][:] = "artefact"
    rays["status"][:] = "unlisted"
    return [chip for chip, *_ in struck], rays


def make(scene: Scene, out: Path, redraw: bool = False) -> list[tuple[str, int]]:
    """Write the spectrum and its truth; (name, bytes) of both files."""
    lines, identity = redrawn(scene) if redraw else kept(scene, HERE)
    chips, truth = exposed(scene, lines)
    meta = {"spectrum": scene.file, "medium": scene.medium, "frame": scene.frame,
            "resolution": f"{scene.camera.resolution:g}", "catalogue": identity}
    text = ecsv_text(truth, columns_of(scene), meta)
    made = {scene.file: file_bytes(scene, chips), f"{scene.name}_truth.ecsv": text.encode()}
    return [(name, keep(out, name, data)) for name, data in made.items()]


def listing() -> str:
    """samples.json."""
    rows = [
        {"file": s.file, "title": s.title, "description": s.description, "medium": s.medium,
         "frame": s.frame, "truth": f"{s.name}_truth.ecsv", "read_options": dict(s.read_options)}
        for s in SCENES
    ]
    return json.dumps(rows, indent=2) + "\n"


def main(arguments: list[str] | None = None) -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("names", nargs="*", help="scenes; all by default")
    parser.add_argument("--out", type=Path, default=HERE)
    parser.add_argument("--redraw", action="store_true", help="line lists from the catalogue")
    given = parser.parse_args(arguments)
    scenes = [s for s in SCENES if not given.names or s.name in given.names]
    unknown = set(given.names) - {s.name for s in SCENES}
    if unknown:
        parser.error(f"no scene called {', '.join(sorted(unknown))}")
    given.out.mkdir(parents=True, exist_ok=True)
    for scene in scenes:
        for name, size in make(scene, given.out, given.redraw):
            print(f"{name:28s} {size / 1000:9.1f} kB")
    keep(given.out, "samples.json", listing().encode())
    return 0


if __name__ == "__main__":
    sys.exit(main())
