"""Every kind of bad calibrator input gets one sentence that names file, row and column, the documented exit code, and
leaves no result behind; `check` and `run` alike.
"""
import os
import shutil
import sys
import tempfile
import unittest

import numpy as np
from astropy.io import fits
from astropy.table import Table

from pipeline.small_run import check_refused, contents, copy_of, make_survey, run, write_run_file

CALIBRATORS = "\n[calibrators]\nsupernovae = 6\nshared_hosts = 1\n"
JOIN = '[join]\ncalibrators = "data/calibrators.ecsv"\n'
WITH_COVARIANCE = JOIN + 'covariance = "data/host-covariance.ecsv"\n'
WITH_FITS = JOIN + 'covariance = "covariance.fits"\n'
SURVEY = None


def path(folder, *parts):
    return os.path.join(folder, *parts)


def write(rows, file):
    rows.write(file, format="ascii.ecsv", delimiter=",", overwrite=True)


class BadCalibrators(unittest.TestCase):
    def setUp(self):
        self.folder = copy_of(SURVEY)
        self.table = path(self.folder, "data", "calibrators.ecsv")
        self.matrix = path(self.folder, "data", "host-covariance.ecsv")

    def tearDown(self):
        shutil.rmtree(os.path.dirname(self.folder), ignore_errors=True)

    def refused(self, more, *words, code=3):
        write_run_file(self.folder, more)
        for command in ("check", "run"):
            check_refused(self, self.folder, code, words, command)

    def change(self, column, row, value):
        rows = Table.read(self.table)
        rows[column] = rows[column].astype(object if isinstance(value, str) else float)
        rows[column][row] = value
        if isinstance(value, str):
            rows[column] = rows[column].astype(str)
        else:
            rows[column].unit = "mag"
        write(rows, self.table)

    # Run file.

    def test_both_ways_of_joining(self):
        self.refused(JOIN + "m_b = -19.2\nm_b_error = 0.03\n", "run.toml, row", "m_b", "calibrators")

    def test_covariance_without_calibrators(self):
        self.refused('[join]\nm_b = -19.2\nm_b_error = 0.03\ncovariance = "data/host-covariance.ecsv"\n',
                     "run.toml, row", "covariance", "calibrators")

    def test_files_that_are_not_there(self):
        self.refused('[join]\ncalibrators = "absent.ecsv"\n', "run.toml, row", "column calibrators", "absent.ecsv")
        self.refused(JOIN + 'covariance = "absent.fits"\n', "run.toml, row", "column covariance", "absent.fits")

    # Table.

    def test_calibrator_without_a_distance(self):
        self.change("distance_modulus", 3, np.nan)
        self.refused(JOIN, "calibrators.ecsv, row 4, column distance_modulus", "has no distance")

    def test_error_that_is_not_positive(self):
        self.change("distance_modulus_error", 3, 0.0)
        self.refused(JOIN, "calibrators.ecsv, row 4, column distance_modulus_error")

    def test_calibrator_listed_twice(self):
        self.change("supernova", 3, str(Table.read(self.table)["supernova"][2]))
        self.refused(JOIN, "calibrators.ecsv, row 4, column supernova", "twice", "row 3")

    def test_unknown_calibrator(self):
        self.change("supernova", 3, "Nera-004")
        self.refused(JOIN, "calibrators.ecsv, row 4, column supernova", "Nera-004", "Near-004")

    def test_calibrator_in_the_hubble_flow_too(self):
        rows = Table.read(path(self.folder, "data", "supernovae", "larkspur.ecsv"))
        name = str(rows["supernova"][np.argmin(abs(rows["z_helio"] - 0.06))])
        self.change("supernova", 3, name)
        self.refused(JOIN, "calibrators.ecsv, row 4, column supernova", name, "Hubble flow too", "z_flow")

    def test_one_host_with_two_distances(self):
        self.change("distance_modulus", 1, 31.123)
        self.refused(JOIN, "calibrators.ecsv, row 2, column distance_modulus", "Near host 1", "31.123", "row 1")

    def test_column_and_unit_missing(self):
        rows = Table.read(self.table)
        rows["distance_modulus"].unit = None
        write(rows, self.table)
        self.refused(JOIN, "calibrators.ecsv, column distance_modulus", "unit")
        rows.remove_column("distance_modulus")
        write(rows, self.table)
        self.refused(JOIN, "calibrators.ecsv", "distance_modulus")

    # Covariance.

    def write_fits(self, change, hosts=None):
        rows = Table.read(self.matrix)
        matrix = np.array([rows[name] for name in rows["host"]])
        matrix = change(matrix)
        image = fits.ImageHDU(matrix, name="covariance")
        image.header["BUNIT"] = "mag2"
        names = Table({"host": list(rows["host"]) if hosts is None else hosts})
        fits.HDUList([fits.PrimaryHDU(), image, fits.BinTableHDU(names, name="hosts")]).writeto(
            path(self.folder, "covariance.fits"), overwrite=True)

    def test_sound_fits(self):
        self.write_fits(lambda matrix: matrix)
        write_run_file(self.folder, WITH_FITS)
        done = run("check", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn("6 supernovae in 5 hosts", done.stdout)

    def test_not_symmetric(self):
        def change(matrix):
            matrix[1, 2] += 0.001
            return matrix
        self.write_fits(change)
        self.refused(WITH_FITS, "covariance.fits, row 3, column Near host 2", "not symmetric", "Near host 3")

    def test_not_positive_definite(self):
        def change(matrix):
            matrix[1, 2] = matrix[2, 1] = 1.5 * matrix[1, 1]
            return matrix
        self.write_fits(change)
        self.refused(WITH_FITS, "covariance.fits", "not positive definite", "Near host 2", "Near host 3")

    def test_wrong_size(self):
        self.write_fits(lambda matrix: matrix[:4])
        self.refused(WITH_FITS, "covariance.fits", "4 by 5", "5 hosts")

    def test_value_that_is_not_a_number(self):
        def change(matrix):
            matrix[1, 2] = matrix[2, 1] = np.nan
            return matrix
        self.write_fits(change)
        self.refused(WITH_FITS, "covariance.fits, row 2, column Near host 3", "not a number")

    def test_hosts_that_do_not_match(self):
        hosts = list(Table.read(self.matrix)["host"])
        self.write_fits(lambda matrix: matrix, hosts[:3] + ["Fern", "Ivy"])
        self.refused(WITH_FITS, "covariance.fits, column host", hosts[3], hosts[4])
        self.write_fits(lambda matrix: np.eye(6), hosts + ["Fern"])
        self.refused(WITH_FITS, "covariance.fits, column host", "Fern", "no calibrator")

    def test_table_with_a_column_missing(self):
        rows = Table.read(self.matrix)
        rows.remove_column("Near host 3")
        write(rows, self.matrix)
        self.refused(WITH_COVARIANCE, "host-covariance.ecsv", "5 rows and 4 columns")

    def test_errors_that_contradict_the_covariance(self):
        self.change("distance_modulus_error", 4, 0.3)
        self.refused(WITH_COVARIANCE, "calibrators.ecsv, row 5, column distance_modulus_error", "0.3", "agree")

    # A calibrator that cannot be used.

    def test_no_calibrator_left(self):
        names = set(Table.read(self.table)["supernova"])
        file = path(self.folder, "data", "lightcurves", "larkspur.ecsv")
        rows = Table.read(file)
        rows = rows[~np.isin(rows["supernova"], list(names))]
        write(rows, file)
        write_run_file(self.folder, JOIN)
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 5, done.stderr)
        self.assertIn("Not one of 6 calibrators", done.stderr)
        self.assertIn("no photometry", done.stderr)
        self.assertNotIn("join.ecsv", contents(path(self.folder, "results")))

    def test_calibrator_without_a_redshift_is_left_out(self):
        file = path(self.folder, "data", "supernovae", "larkspur.ecsv")
        rows = Table.read(file)
        name = str(Table.read(self.table)["supernova"][4])
        rows["z_helio"][rows["supernova"] == name] = -0.001
        write(rows, file)
        write_run_file(self.folder, JOIN)
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        row = next(row for row in Table.read(path(self.folder, "results", "calibrators.ecsv"))
                   if row["supernova"] == name)
        self.assertFalse(row["used"])
        self.assertIn("z_helio", row["why_not"])


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-calibrators-")
    try:
        SURVEY = make_survey(path(scratch, "survey"), 30, CALIBRATORS)
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
    sys.exit(0 if outcome.wasSuccessful() else 1)
