#!/usr/bin/python3
"""Fits of published light curves against what is published of the same supernovae.

    THIRDRUNG_REAL_DATA=FOLDER tests/realdata/residuals.py FITS.ecsv SAMPLE [SAMPLE ...]

Prints how many fits are trusted, correlations of s and c with the published shape and colour, the scatter of the dates
of maximum (within 3 d of their median), and the unweighted rms about the magnitude-redshift relation with a line in s and
c and a host-mass step, beside that of the published standardised magnitudes of the same supernovae: 0.015 < z < 0.15,
|c| < 0.3, 0.75 < s < 1.3, published redshifts z_flow (Scolnic et al. 2022, ApJ 938, 113; Carr et al. 2022, PASA 39,
e046). The last lines: rms by chi2 a degree of freedom, fits that are distrusted for nothing else included.
"""
import os
import pathlib
import sys

import numpy as np
from astropy.table import Table

CHI2 = "chi2 too large to be chance"
HARMLESS = {"t_0 outside the data", "some epochs mistrusted", "some bands left out", "epochs chosen twice", "", "--"}


def read(data, fits_file):
    published = {(row["sample"], row["supernova"]): row for row in Table.read(data / "published" / "supernovae.ecsv")}
    fits = [row for row in Table.read(fits_file) if (row["survey"], row["supernova"]) in published]
    hosts = {}
    for survey in {row["survey"] for row in fits}:
        table = Table.read(data / "supernovae" / f"{survey}.ecsv")
        if "host_log_mass" in table.colnames:
            hosts.update({(survey, row["supernova"]): row["host_log_mass"] for row in table})
    out = []
    for row in fits:
        key = (row["survey"], row["supernova"])
        mass = hosts.get(key, np.ma.masked)
        told = published[key]
        only_chi2 = {word for word in str(row["remarks"]).split("; ")} - HARMLESS == {CHI2}
        out.append((key[0], told["z_flow"], row["m_b"], row["m_b_error"], row["s"], row["c"],
                    10.0 if mass is np.ma.masked else float(mass), bool(row["trusted"]), only_chi2,
                    row["chi2"] / max(1, row["dof"]), row["t_0"] - told["peak_mjd"], told["shape"], told["colour"],
                    told["m_b_standardised"], told["in_hubble_flow"] == 1))
    names = "survey z m m_error s c mass trusted only_chi2 chi2 late shape colour published flow"
    return Table(rows=out, names=names.split())


def distance(z, q0=-0.55, j0=1.0):
    """5 log10 of the luminosity distance in c/H0, to third order in z (Visser 2004, Class. Quantum Grav. 21, 2603)."""
    return 5 * np.log10(z * (1 + (1 - q0) * z / 2 - (1 - q0 - 3 * q0**2 + j0) * z**2 / 6))


def residuals(table, those):
    """About the relation that the rows `those` give; and of the published magnitudes about their mean."""
    weight = 1 / np.sqrt(0.1**2 + table["m_error"]**2 + (2.17 * 250 / 299792.458 / table["z"])**2)
    design = np.c_[np.ones(len(table)), 1 - table["s"], table["c"], 0.5 - (table["mass"] > 10)]
    above = table["m"] - distance(table["z"])
    found = np.linalg.lstsq((design * weight[:, None])[those], (above * weight)[those], rcond=None)[0]
    published = table["published"] - distance(table["z"])
    return above - design @ found, published - np.average(published[those], weights=weight[those]**2)


def rms(values):
    return np.sqrt(np.mean(np.square(values)))


def main():
    samples = sys.argv[2:]
    table = read(pathlib.Path(os.environ["THIRDRUNG_REAL_DATA"]), sys.argv[1])
    table = table[np.isin(table["survey"], samples)]
    print(f"{np.sum(table['trusted'])} of {len(table)} fits with a published row are trusted")
    for sample in samples:
        some = table[(table["survey"] == sample) & table["trusted"]]
        late = some["late"] - np.median(some["late"])
        print(f"  {sample}: {len(some)} of {np.sum(table['survey'] == sample)}; s and shape "
              f"{np.corrcoef(some['s'], some['shape'])[0, 1]:.3f}, c and colour "
              f"{np.corrcoef(some['c'], some['colour'])[0, 1]:.3f}, dates {np.std(late[np.abs(late) < 3]):.2f} d")
    normal = (np.abs(table["c"]) < 0.3) & (table["s"] > 0.75) & (table["s"] < 1.3) & (table["z"] > 0.015)
    near = normal & (table["z"] < 0.15)
    for name, those in (("trusted", near & table["trusted"]), ("all", near),
                        ("trusted, in the published Hubble flow", near & table["trusted"] & table["flow"])):
        ours, published = residuals(table, those)
        print(f"{name}: {np.sum(those)} supernovae, rms {rms(ours[those]):.4f} mag, published "
              f"{rms(published[those]):.4f}")
    wide = normal & (table["z"] < 0.2)
    ours, _ = residuals(table, wide & table["trusted"])
    for low, high in ((0, 1), (1, 2), (2, 3), (3, 4), (4, 100)):
        those = wide & (table["trusted"] | table["only_chi2"]) & (table["chi2"] >= low) & (table["chi2"] < high)
        if np.sum(those) > 2:
            print(f"chi2 a degree of freedom {low} to {high}: {np.sum(those)} supernovae, rms "
                  f"{rms(ours[those]):.3f} mag")


if __name__ == "__main__":
    main()
