"""Ten million samples in a vacuum FITS table: time against a raw read, peak memory.

Raw read: the three columns memory-mapped by astropy and copied to native numbers. Rounds
alternate in one process, the first of each is dropped; the peak is of a fresh process, over
what it held after its imports, against the arrays of the spectrum.

    python tests/studies/spectra_speed_study.py [samples] [rounds]
"""

from __future__ import annotations

import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from astropy.io import fits

from linewright.spectra.reading import read_spectrum

PEAK = """
import re, sys
import astropy.io.fits, linewright.spectra.reading, linewright.spectra.fits_files
def highest():  # kB of this process image; getrusage would count the parent's too
    return int(re.search(r"VmHWM:\\s+(\\d+)", open("/proc/self/status").read()).group(1))
before = highest()
spectrum = linewright.spectra.reading.read_spectrum(sys.argv[1])
peak = highest() - before
arrays = sum(a.nbytes for s in spectrum.segments for a in (s.wave, s.flux, s.uncertainty, s.mask))
print(peak * 1024 / arrays)
"""


def make(path: Path, samples: int) -> None:
    columns = [fits.Column("WAVE", "D", unit="Angstrom", array=5000 + 1e-3 * np.arange(samples)),
               fits.Column("FLUX", "D", array=np.random.default_rng(0).normal(1, 0.01, samples)),
               fits.Column("ERR", "D", array=np.full(samples, 0.01))]
    hdu = fits.BinTableHDU.from_columns(columns)
    hdu.header["MEDIUM"] = "vacuum"
    fits.HDUList([fits.PrimaryHDU(), hdu]).writeto(path)


def raw(path: Path) -> None:
    with fits.open(path, memmap=True) as hdus:
        for number in range(3):
            np.array(hdus[1].data.field(number), dtype=float)


def timed(work, path: Path) -> float:
    start = time.perf_counter()
    work(path)
    return time.perf_counter() - start


def main() -> None:
    samples = int(sys.argv[1]) if len(sys.argv) > 1 else 10_000_000
    rounds = int(sys.argv[2]) if len(sys.argv) > 2 else 7
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "long.fits"
        make(path, samples)
        pairs = [(timed(raw, path), timed(read_spectrum, path)) for _ in range(rounds + 1)][1:]
        ratio = statistics.median(b / a for a, b in pairs)
        print(f"raw {statistics.median(a for a, _ in pairs):.2f} s, read "
              f"{statistics.median(b for _, b in pairs):.2f} s, ratio {ratio:.2f} (aim 1.3)")
        peak = subprocess.run([sys.executable, "-c", PEAK, str(path)], capture_output=True,
                              text=True, check=True).stdout
        print(f"peak memory over the arrays: {float(peak):.2f} (aim 2)")


if __name__ == "__main__":
    main()
