"""Writers of the sample files: no dates, no program versions, the same bytes every time."""

from __future__ import annotations

import gzip
import io
from pathlib import Path

import numpy as np

from .detector import Chip
from .scenes import Scene

OBSERVATORY = "Corrie Observatory (imaginary)"
SPECSYS = {"barycentric": "BARYCENT", "heliocentric": "HELIOCEN", "topocentric": "TOPOCENT"}


def _header(hdu, scene: Scene) -> None:
    header = hdu.header
    header["OBJECT"] = scene.title.split(",")[0]
    header["OBSERVAT"] = (OBSERVATORY, "no such place")
    header["SPECSYS"] = SPECSYS[scene.frame]


def _axis(hdu, scene: Scene, chip: Chip) -> None:
    header, camera = hdu.header, scene.camera
    kind = "AWAV" if scene.medium == "air" else "WAVE"
    first = float(chip.wave[0])
    header["CTYPE1"] = kind + ("-LOG" if camera.log_step else "")
    header["CUNIT1"] = "Angstrom"
    header["CRPIX1"] = 1.0
    header["CRVAL1"] = first
    header["CDELT1"] = first * camera.step if camera.log_step else camera.step


def _single(values, digits: int) -> np.ndarray:
    return np.round(values, digits).astype(">f4")


def _filled(scene: Scene, chips: list[Chip]) -> Chip:
    """One axis over all detectors; the gaps hold zeros, as many pipelines leave them."""
    step, first = scene.camera.step, float(chips[0].wave[0])
    count = int(np.rint((chips[-1].wave[-1] - first) / step)) + 1
    wave = first + step * np.arange(count)
    flux, error = np.zeros(count), np.zeros(count)
    for chip in chips:
        start = int(np.rint((chip.wave[0] - first) / step))
        flux[start : start + len(chip.wave)] = chip.flux
        error[start : start + len(chip.wave)] = chip.error
    return Chip(wave, flux, error)


def _images(scene: Scene, chip: Chip):
    from astropy.io import fits

    flux = fits.PrimaryHDU(_single(chip.flux, 5))
    error = fits.ImageHDU(_single(chip.error, 5), name="ERROR")
    _header(flux, scene)
    for hdu in (flux, error):
        _axis(hdu, scene, chip)
    return fits.HDUList([flux, error])


def _vectors(scene: Scene, chips: list[Chip], label: str):
    """A table of vector cells, a detector or order a row."""
    from astropy.io import fits

    count = min(len(c.wave) for c in chips)
    number = np.arange(1, len(chips) + 1, dtype=">i2")
    wave = np.array([np.round(c.wave[:count], 5) for c in chips]).astype(">f8")
    flux = np.array([_single(c.flux[:count], 1) for c in chips])
    error = np.array([_single(c.error[:count], 1) for c in chips])
    table = fits.BinTableHDU.from_columns([
        fits.Column(label, "I", array=number),
        fits.Column("WAVE", f"{count}D", unit="Angstrom", array=wave),
        fits.Column("FLUX", f"{count}E", unit="electron", array=flux),
        fits.Column("ERR", f"{count}E", unit="electron", array=error),
    ], name="SPECTRUM")
    _header(table, scene)
    table.header["WAVEMED"] = (scene.medium, "medium of WAVE")
    primary = fits.PrimaryHDU()
    return fits.HDUList([primary, table])


def _text(scene: Scene, chips: list[Chip]) -> str:
    lines = [
        f"# {scene.title}", f"# {OBSERVATORY}",
        f"# {scene.medium} wavelengths in Angstrom, {scene.frame} frame",
        "# wave[Angstrom] flux err",
    ]
    for chip in chips:
        lines += map("%.4f %.5f %.5f".__mod__, zip(chip.wave, chip.flux, chip.error, strict=True))
    return "\n".join(lines) + "\n"


def _ecsv(scene: Scene, chips: list[Chip]) -> str:
    chip, unit = chips[0], "1e-17 erg / (s cm2 Angstrom)"
    head = ["%ECSV 1.0", "---", "delimiter: ' '", "datatype:",
            "- {name: wave, unit: Angstrom, datatype: float64, description: air wavelength}",
            f"- {{name: flux, unit: {unit}, datatype: float64}}",
            f"- {{name: err, unit: {unit}, datatype: float64}}",
            "meta: !!omap", f"- {{OBJECT: '{scene.title.split(',')[0]}'}}",
            f"- {{SPECSYS: {SPECSYS[scene.frame]}}}", f"- {{WAVEMED: {scene.medium}}}"]
    lines = [f"# {line}" for line in head] + ["wave flux err"]
    lines += map("%.3f %.4f %.4f".__mod__, zip(chip.wave, chip.flux, chip.error, strict=True))
    return "\n".join(lines) + "\n"


def file_bytes(scene: Scene, chips: list[Chip]) -> bytes:
    """The finished file."""
    if scene.layout in ("text", "ecsv"):
        raw = (_text if scene.layout == "text" else _ecsv)(scene, chips).encode()
    else:
        raw = _fits(scene, chips)
    if scene.file.endswith(".gz"):
        return gzip.compress(raw, 9, mtime=0)
    return raw


def _fits(scene: Scene, chips: list[Chip]) -> bytes:
    if scene.layout == "image":
        hdus = _images(scene, _filled(scene, chips))
    elif scene.layout == "log_image":
        hdus = _images(scene, chips[0])
    else:
        hdus = _vectors(scene, chips, "ORDER" if scene.layout == "orders" else "DETECTOR")
    buffer = io.BytesIO()
    hdus.writeto(buffer, checksum=False)
    return buffer.getvalue()


def keep(folder: Path, name: str, data: bytes) -> int:
    """Write a file; its size in bytes."""
    (folder / name).write_bytes(data)
    return len(data)
