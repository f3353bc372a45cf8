"""The fit of three real supernovae against scipy's of the same model.

Source: lightcurve/scipy_fit.py, which shares no code with the program: scipy's splines and least squares, the direct
integral over a grid of 5 angstrom or less, the full covariance matrix. Tolerance: 0.02 sigma in every parameter, 2% in
every error.
"""
import os
import pathlib
import subprocess
import sys
import tempfile

import numpy as np
from astropy.table import Table

from lightcurve.scipy_fit import Template, fit_of

SOURCE = pathlib.Path(os.environ["THIRDRUNG_SOURCE_DIR"])
DATA = pathlib.Path(os.environ.get("THIRDRUNG_REAL_DATA", SOURCE / ".." / "shared" / "data")).resolve()
TOOL = pathlib.Path(os.environ["THIRDRUNG_TOOLS"]) / "fit_light_curves"
# A shipped template with real light curves of three surveys; without one, the tests' own, whose fits are good only where
# the data are noisy.
REAL = [("csp", "2005iq"), ("foundation", "2016ccz"), ("cfa3", "2006S")]
INVENTED = [("ps1md", "2010fg"), ("ps1md", "2010fh"), ("ps1md", "2010fj")]


def compare(template_name, sample, supernova, folder):
    subprocess.run([TOOL, DATA, template_name, sample, folder], check=True)
    template = Template.read(folder / "template.fits" if template_name == "invented" else template_name)
    row = next(r for r in Table.read(folder / "lightcurve-fits.ecsv") if r["supernova"] == supernova)
    points = Table.read(folder / "lightcurve-points.ecsv")
    table = Table.read(DATA / "supernovae" / f"{sample}.ecsv")
    ebv = float(table["mw_ebv"][table["supernova"] == supernova][0])
    ours = np.array([row[name] for name in ("t_0", "m_b", "s", "c")])
    errors = np.array([row[name] for name in ("t_0_error", "m_b_error", "s_error", "c_error")])
    # Started away from our answer, so that agreement is not inherited.
    at, covariance, chi2 = fit_of(template, DATA, row, points, ebv).solve(ours + [1.0, 0.1, -0.04, 0.05])
    sigma = np.sqrt(np.diag(covariance))
    off = np.abs(at - ours) / sigma
    print(f"{sample} {supernova}: {row['epochs_used']} epochs, off by", np.array2string(off, precision=5), "sigma, errors by",
          np.array2string(errors / sigma - 1, precision=5), f"chi2 {chi2:.4f} against {row['chi2']:.4f}")
    return off.max() < 0.02 and np.abs(errors / sigma - 1).max() < 0.02 and abs(chi2 - row["chi2"]) < 0.02 * (1 + chi2)


def main():
    if not DATA.is_dir():
        print("skipped: no published data (set THIRDRUNG_REAL_DATA to their folder)")
        return 77
    shipped = sorted((SOURCE / "templates").glob("*.fits*"))
    cases = [(str(shipped[0]), *one) for one in REAL] if shipped else [("invented", *one) for one in INVENTED]
    with tempfile.TemporaryDirectory() as folder:
        good = [compare(*case, pathlib.Path(folder)) for case in cases]
    return 0 if all(good) else 1


if __name__ == "__main__":
    sys.exit(main())
