#!/usr/bin/python3
"""How far a light curve that starts late can be trusted: published light curves with their early epochs taken away.

    THIRDRUNG_REAL_DATA=FOLDER tests/realdata/late_starts.py PROGRAM FOLDER_FOR_RESULTS

Light curves with a trusted fit and an epoch before -3 d are fitted again without what was measured before +2, +6, +9 or
+12 rest-frame days, and compared with their fit as a whole: by the error of t_0 that the shortened fit states, how far
m_B + alpha (s - 1) - beta c has moved, its mean and scatter, and its pull.
"""
import os
import pathlib
import re
import subprocess
import sys

import numpy as np
from astropy.table import Table

ALPHA, BETA = 1.8, 2.85  # docs/validation.md, all samples.
NAMES = ("t_0", "m_b", "s", "c")
CROSS = ("cov_t0_mb", "cov_t0_s", "cov_t0_c", "cov_mb_s", "cov_mb_c", "cov_s_c")
NO_MATTER = {"data start late", "t_0 outside the data", "some epochs mistrusted", "some bands left out",
             "epochs chosen twice", ""}


def fit(program, run_file, text):
    run_file.write_text(text)
    subprocess.run([program, "fit", "--afresh", str(run_file)], check=True, stdout=subprocess.DEVNULL)
    return Table.read(run_file.parent / run_file.stem / "lightcurve-fits.ecsv")


def covariance(row):
    out = np.diag([float(row[name + "_error"]) ** 2 for name in NAMES])
    out[np.triu_indices(4, 1)] = [float(row[name]) for name in CROSS]
    return np.triu(out) + np.triu(out, 1).T


def main():
    program, out = sys.argv[1], pathlib.Path(sys.argv[2]).resolve()
    data = pathlib.Path(os.environ["THIRDRUNG_REAL_DATA"])
    here = pathlib.Path(__file__).resolve().parent
    out.mkdir(parents=True, exist_ok=True)
    text = (here / "hubbleflow.toml").read_text()
    text = text[:text.index("[[systematic]]")].replace("../../templates", str(here.parents[1] / "templates"))
    samples = re.findall(r'^name = "(\w+)"$', text, re.M)

    def run_file_of(name):
        return text.replace("${THIRDRUNG_RESULTS}/hubbleflow", str(out / name))

    whole = {(row["survey"], row["supernova"]): row for row in fit(program, out / "whole.toml", run_file_of("whole"))
             if row["trusted"] and row["first_phase"] < -3}
    weights = np.array([0, 1, ALPHA, -BETA])
    for cut in (2, 6, 9, 12):
        for sample in samples:
            table = Table.read(data / "lightcurves" / f"{sample}.ecsv")
            rows = [whole.get((sample, name)) for name in table["supernova"]]
            keep = [row is not None and (mjd - row["t_0"]) / (1 + row["z_helio"]) > cut
                    for row, mjd in zip(rows, table["mjd"])]
            table[keep].write(out / f"{sample}-{cut}.ecsv", overwrite=True)
        shortened = fit(program, out / f"from-{cut}.toml",
                        re.sub(r"\$\{THIRDRUNG_REAL_DATA\}/lightcurves/(\w+)\.ecsv", rf"{out}/\1-{cut}.ecsv",
                               run_file_of(f"from-{cut}")))
        seen = []
        for row in shortened:
            if np.ma.is_masked(row["m_b"]) or not set(str(row["remarks"]).split("; ")) <= NO_MATTER:
                continue
            other = whole[(row["survey"], row["supernova"])]
            moved = weights @ np.array([float(row[name]) - float(other[name]) for name in NAMES])
            error = np.sqrt(weights @ covariance(row) @ weights)
            seen.append((row["t_0_error"] / (1 + row["z_helio"]), moved, moved / error))
        seen = np.array(seen)
        for low, high in ((0, 0.5), (0.5, 1), (1, 1.5), (1.5, 3)):
            some = seen[(seen[:, 0] >= low) & (seen[:, 0] < high)]
            print(f"from +{cut:2d} d, error of t_0 {low:.1f} to {high:.1f} d: {len(some):3d} supernovae moved by "
                  f"{np.mean(some[:, 1]):+.3f} mag, scatter {np.std(some[:, 1]):.3f} mag, pull {np.std(some[:, 2]):.2f}")


if __name__ == "__main__":
    main()
