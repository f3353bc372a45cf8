"""The result tables of a run, read with astropy and done again with numpy.

- a_B and its error from covariance.fits and standardised.ecsv by generalised least squares: to 1e-9, rounding.
- The parts of the covariance and of the budget add up: to 1e-9 of the whole.
- The shifts of systematics against runs whose inputs were moved on disk: the fits are the same up to where their
  iterations stop (1e-4 sigma), so to 2e-4 mag.
- Names and numbers of summary.json are those of the tables.
"""
import json
import os
import shutil
import sys
import tempfile
import unittest

import numpy as np
from astropy.io import fits
from astropy.table import Table

from pipeline.small_run import copy_of, make_survey, move_zero_point, run, write_run_file

MORE = """
[standardisation]
alpha = 1.3
beta = 3.0
gamma = 0.05
sigma_int = 0.1
refit_with_systematics = false
[[systematic]]
kind = "zero_point"
[[systematic]]
kind = "redshift"
[[systematic]]
kind = "milky_way_scale"
[scans]
all = true
"""
SURVEY = None
SPEED_OF_LIGHT = 299792.458


def path(folder, *parts):
    return os.path.join(folder, *parts)


def table(folder, name):
    return Table.read(path(folder, "results", name), format="ascii.ecsv" if name.endswith("ecsv") else None)


def single_intercepts(magnitudes):
    """log10(c H0 d_L/c) - 0.2 m by name, with q0 = -0.55, j0 = 1."""
    z, z_helio = np.asarray(magnitudes["z_flow"]), np.asarray(magnitudes["z_helio"])
    series = SPEED_OF_LIGHT * z * (1 + 1.55 * z / 2 - (1.55 - 3 * 0.55 ** 2 + 1) * z ** 2 / 6)
    y = np.log10(series * (1 + z_helio) / (1 + z)) - 0.2 * np.asarray(magnitudes["m_b_standardised"])
    return dict(zip(magnitudes["supernova"], y))


def change_column(folder, column, change):
    file = path(folder, "data", "supernovae", "larkspur.ecsv")
    rows = Table.read(file, format="ascii.ecsv")
    rows[column] = change(rows[column])
    rows.write(file, format="ascii.ecsv", delimiter=",", overwrite=True)


class Results(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = copy_of(SURVEY)
        write_run_file(cls.folder, MORE)
        done = run("run", path(cls.folder, "run.toml"))
        if done.returncode != 0:
            raise AssertionError(done.stderr)
        cls.quantities = {row["quantity"]: row for row in table(cls.folder, "intercept.ecsv")}

    @classmethod
    def tearDownClass(cls):
        shutil.rmtree(os.path.dirname(cls.folder), ignore_errors=True)

    def test_every_table_is_read(self):
        names = sorted(os.listdir(path(self.folder, "results")))
        for name in names:
            if name.endswith(".ecsv"):
                self.assertGreater(len(table(self.folder, name).colnames), 0, name)
        for name in ("sample", "standardised"):
            ecsv, binary = table(self.folder, name + ".ecsv"), table(self.folder, name + ".fits")
            self.assertEqual(ecsv.colnames, binary.colnames)
            for column in ecsv.colnames:
                if ecsv[column].dtype.kind == "f":
                    np.testing.assert_array_equal(np.ma.filled(np.ma.asarray(ecsv[column], float), np.nan),
                                                  np.ma.filled(np.ma.asarray(binary[column], float), np.nan))

    def test_intercept(self):
        rows = table(self.folder, "standardised.ecsv")
        z = np.asarray(rows["z_flow"])
        single = single_intercepts(table(self.folder, "magnitudes.ecsv"))
        y = np.array([single[name] for name in rows["supernova"]])
        np.testing.assert_allclose(y, rows["ab_single"], atol=1e-10)
        used = np.asarray(rows["used"])
        np.testing.assert_array_equal(used, (z > 0.0233) & (z < 0.15))
        with fits.open(path(self.folder, "results", "covariance.fits")) as file:
            self.assertEqual(list(file["supernovae"].data["supernova"]), list(rows["supernova"]))
            covariance = 0.04 * file["total"].data[np.ix_(used, used)]
            weighting = 0.04 * file["weighting"].data[np.ix_(used, used)]
        weights = np.linalg.solve(weighting, np.ones(used.sum()))
        weights /= weights.sum()
        error = np.sqrt(weights @ covariance @ weights)
        self.assertAlmostEqual(weights @ y[used], self.quantities["a_b"]["value"], delta=1e-9)
        self.assertAlmostEqual(error, self.quantities["a_b"]["error"], delta=1e-9)
        np.testing.assert_allclose(weights, np.asarray(rows["weight"])[used], atol=1e-9)

    def test_covariance_adds_up(self):
        with fits.open(path(self.folder, "results", "covariance.fits")) as file:
            total, shifts = file["total"].data, file["shifts"].data
            statistical = np.diag(file["diagonals"].data.sum(axis=0))
            for image in file["matrix_parts"].data["image"]:
                statistical = statistical + file[image].data
            np.testing.assert_allclose(file["statistical"].data, statistical, atol=1e-12)
            np.testing.assert_allclose(file["systematic"].data, shifts.T @ shifts, atol=1e-12)
            np.testing.assert_allclose(total, statistical + shifts.T @ shifts, atol=1e-12)
            self.assertGreater(np.linalg.eigvalsh(total).min(), 0)

    def test_budget_adds_up(self):
        shares = np.asarray(table(self.folder, "budget.ecsv")["variance_share"])
        self.assertAlmostEqual(shares.sum() / self.quantities["a_b"]["error"] ** 2, 1, delta=1e-9)

    def test_summary(self):
        with open(path(self.folder, "results", "summary.json"), encoding="utf-8") as text:
            summary = json.load(text)
        self.assertEqual(summary["a_b"]["value"], self.quantities["a_b"]["value"])
        self.assertEqual(summary["supernovae"], np.asarray(table(self.folder, "sample.ecsv")["used"]).sum())
        residuals = np.asarray(table(self.folder, "standardised.ecsv")["residual"])
        used = np.asarray(table(self.folder, "standardised.ecsv")["used"])
        self.assertAlmostEqual(summary["scatter_mag"], np.sqrt(np.mean(residuals[used] ** 2)), delta=1e-12)
        for name in summary["files"]:
            self.assertTrue(os.path.exists(path(self.folder, "results", name)), name)

    def check_against_rerun(self, systematic, move):
        """The stored shifts against a run whose inputs `move` has changed on disk."""
        moved = copy_of(SURVEY)
        try:
            write_run_file(moved, MORE)
            move(moved)
            for command in ("fit", "select", "standardise"):
                done = run(command, path(moved, "run.toml"))
                self.assertEqual(done.returncode, 0, done.stderr)
            after = single_intercepts(table(moved, "magnitudes.ecsv"))
        finally:
            shutil.rmtree(os.path.dirname(moved), ignore_errors=True)
        before = single_intercepts(table(self.folder, "magnitudes.ecsv"))
        with fits.open(path(self.folder, "results", "systematic-shifts.fits")) as file:
            names = list(file["supernovae"].data["supernova"])
            row = list(file["systematics"].data["name"]).index(systematic)
            shifts = dict(zip(names, file["shifts"].data[row]))
        common = [name for name in names if name in after]
        self.assertGreater(len(common), 0.9 * len(names))
        again = [-5 * (after[name] - before[name]) for name in common]
        np.testing.assert_allclose([shifts[name] for name in common], again, atol=2e-4)
        self.assertGreater(np.abs(again).max(), 2e-4)

    def test_zero_point_shift(self):
        self.check_against_rerun("zero point lark-g", lambda folder: move_zero_point(folder, "lark-g", 0.005))

    def test_redshift_shift(self):
        self.check_against_rerun("redshift offset", lambda folder: change_column(folder, "z_helio", lambda z: z + 4e-5))

    def test_reddening_shift(self):
        self.check_against_rerun("Milky Way reddening scale",
                                 lambda folder: change_column(folder, "mw_ebv", lambda ebv: 1.05 * ebv))


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-survey-")
    try:
        SURVEY = make_survey(path(scratch, "survey"), 60)
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
    sys.exit(0 if outcome.wasSuccessful() else 1)
