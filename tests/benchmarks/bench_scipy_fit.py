"""How much faster the program fits a light curve than scipy fits the same model by the direct integral.

Usage: THIRDRUNG_TOOLS=<build>/tools PYTHONPATH=tests python3 tests/benchmarks/bench_scipy_fit.py [SAMPLE [COUNT]]
Both on one thread, in processor time, in one run: ours with the scan for a start, the making of the band tables and all
of the result; scipy's from a start near the answer.
"""
import os

os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import pathlib
import subprocess
import sys
import tempfile
import time

import numpy as np
from astropy.table import Table

from lightcurve.scipy_fit import Template, fit_of

SOURCE = pathlib.Path(__file__).resolve().parents[2]
DATA = pathlib.Path(os.environ.get("THIRDRUNG_REAL_DATA", SOURCE / ".." / "shared" / "data")).resolve()
TOOL = pathlib.Path(os.environ["THIRDRUNG_TOOLS"]) / "fit_light_curves"


def main(sample="ps1md", count=8):
    shipped = sorted((SOURCE / "templates").glob("*.fits*"))
    name = str(shipped[0]) if shipped else "invented"
    with tempfile.TemporaryDirectory() as text:
        folder = pathlib.Path(text)
        out = subprocess.run([TOOL, DATA, name, sample, folder, "50"], check=True, capture_output=True, text=True).stdout
        ours = {line.split()[0]: float(line.split()[1]) for line in out.splitlines()}
        template = Template.read(name if shipped else folder / "template.fits")
        rows = Table.read(folder / "lightcurve-fits.ecsv")
        points = Table.read(folder / "lightcurve-points.ecsv")
    table = Table.read(DATA / "supernovae" / f"{sample}.ecsv")
    ratios = []
    for row in [row for row in rows if row["trusted"]][:count]:
        ebv = float(table["mw_ebv"][table["supernova"] == row["supernova"]][0])
        fit = fit_of(template, DATA, row, points, ebv)
        start = np.array([row[name] for name in ("t_0", "m_b", "s", "c")]) + [1.0, 0.1, -0.04, 0.05]
        before = time.process_time()
        fit.solve(start)
        scipy_ms = 1e3 * (time.process_time() - before)
        ratios.append(scipy_ms / ours[row["supernova"]])
        print(f"{row['supernova']}: {row['epochs_used']} epochs, ours {ours[row['supernova']]:.3f} ms, "
              f"scipy {scipy_ms:.0f} ms, ratio {ratios[-1]:.0f}")
    print(f"all {len(ours)} supernovae of {sample}: {np.mean(list(ours.values())):.3f} ms each; "
          f"median ratio {np.median(ratios):.0f}")


if __name__ == "__main__":
    main(*sys.argv[1:2], *[int(one) for one in sys.argv[2:3]])
