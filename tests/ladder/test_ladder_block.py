"""The join of calibrators and Hubble flow, from outside: the ladder block read with astropy and solved with numpy, its
rows made again from the other tables, its shifts by running the program on changed inputs, and the simulated truth.
"""
import json
import os
import re
import shutil
import sys
import tempfile
import unittest

import numpy as np
from astropy.io import fits
from astropy.table import Table

from pipeline.small_run import RUN, contents, copy_of, make_survey, move_zero_point, run, write_run_file

CALIBRATORS = """
[calibrators]
supernovae = 9
shared_hosts = 1
modulus_error = 0.05
common_error = 0.03
"""
JOIN = """
[join]
calibrators = "data/calibrators.ecsv"
covariance = "data/host-covariance.ecsv"
"""
SYSTEMATICS = """
[[systematic]]
kind = "zero_point"
[[systematic]]
kind = "milky_way_scale"
[[systematic]]
kind = "redshift"
"""
OPEN = RUN.replace('output = "results"', 'output = "results"\nblind = false')
H0, M_B = 70.0, -19.25  # The defaults of docs/simulation.md.
SURVEY = None
FINISHED = None


def path(folder, *parts):
    return os.path.join(folder, *parts)


def table(folder, name):
    return Table.read(path(folder, "results", name))


def quantities(folder):
    return {row["quantity"]: row for row in table(folder, "join.ecsv")}


def finished(folder, more=JOIN + SYSTEMATICS, text=OPEN):
    write_run_file(folder, more, text)
    done = run("run", path(folder, "run.toml"))
    if done.returncode != 0:
        sys.exit(done.stderr)
    return done.stdout


def block_of(folder):
    with fits.open(path(folder, "results", "ladder-block.fits")) as file:
        return {part.name.upper(): part.data for part in file}, dict(file[0].header)


def solved(block):
    """docs/ladder-block.md."""
    y, design = block["Y"], block["L"]
    weighed = np.linalg.solve(block["W"], design)
    weights = np.linalg.solve(design.T @ weighed, weighed.T)
    return weights @ y, weights @ block["C"] @ weights.T, weights


class LadderBlock(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = FINISHED
        cls.block, cls.header = block_of(cls.folder)
        cls.join = quantities(cls.folder)
        cls.kind = np.asarray(cls.block["ROWS"]["kind"])
        cls.names = list(cls.block["PARAMETERS"]["name"])

    def test_numpy_solves_it(self):
        theta, covariance, _ = solved(self.block)
        k, m = self.names.index("five_log10_H0"), self.names.index("M_B")
        h0 = 10 ** (0.2 * theta[k])
        self.assertAlmostEqual(h0, self.join["h0"]["value"], delta=1e-6)
        error = h0 * 0.2 * np.log(10) * np.sqrt(covariance[k, k])
        self.assertAlmostEqual(error, self.join["h0"]["error"], delta=1e-6)
        self.assertAlmostEqual(theta[m], self.join["m_b"]["value"], delta=1e-8)
        self.assertAlmostEqual(np.sqrt(covariance[m, m]), self.join["m_b"]["error"], delta=1e-8)
        correlation = covariance[m, k] / np.sqrt(covariance[m, m] * covariance[k, k])
        self.assertAlmostEqual(correlation, self.join["correlation"]["value"], delta=1e-6)
        np.testing.assert_allclose(covariance, self.block["COVARIANCE_OF_PARAMETERS"], atol=1e-9)
        self.assertAlmostEqual(self.header["H0"], h0, delta=1e-6)

    def test_chi2(self):
        theta, _, _ = solved(self.block)
        residuals = self.block["Y"] - self.block["L"] @ theta
        self.assertAlmostEqual(residuals @ np.linalg.solve(self.block["W"], residuals), self.join["chi2"]["value"],
                               delta=1e-6)
        self.assertEqual(len(residuals) - len(theta), self.join["dof"]["value"])

    def test_shares(self):
        _, _, weights = solved(self.block)
        w = weights[self.names.index("five_log10_H0")]
        whole = w @ self.block["C"] @ w
        parts = dict(zip(self.block["DIAGONAL_PARTS"]["name"], (np.diag(row) for row in self.block["DIAGONALS"])))
        for row in self.block["MATRIX_PARTS"]:
            parts[row["name"]] = self.block[row["image"].upper()]
        coefficients = parts.pop("standardisation coefficients")
        flow = np.where(self.kind == "hubble_flow", w, 0)
        others = w - flow
        rest = sum(parts.values())
        for name, variance in (("calibrators", others @ rest @ others), ("hubble_flow", flow @ rest @ flow),
                               ("coefficients", w @ coefficients @ w),
                               ("systematics", w @ self.block["SYSTEMATIC"] @ w)):
            self.assertAlmostEqual(variance / whole, self.join["share_of_" + name]["value"], delta=1e-9, msg=name)
        shares = [self.join["share_of_" + name]["value"]
                  for name in ("calibrators", "hubble_flow", "coefficients", "systematics")]
        self.assertAlmostEqual(sum(shares), 1, delta=1e-9)

    def test_parts_add_up(self):
        block = self.block
        statistical = np.diag(block["DIAGONALS"].sum(axis=0))
        for image in block["MATRIX_PARTS"]["image"]:
            statistical = statistical + block[image.upper()]
        np.testing.assert_allclose(block["STATISTICAL"], statistical, atol=1e-12)
        np.testing.assert_allclose(block["SYSTEMATIC"], block["SHIFTS"].T @ block["SHIFTS"], atol=1e-12)
        np.testing.assert_allclose(block["C"], block["STATISTICAL"] + block["SYSTEMATIC"], atol=1e-12)
        image = dict(zip(block["MATRIX_PARTS"]["name"], block["MATRIX_PARTS"]["image"]))
        np.testing.assert_allclose(block["C"] - block["W"], block[image["standardisation coefficients"].upper()],
                                   atol=1e-12)
        self.assertGreater(np.linalg.eigvalsh(block["W"]).min(), 0)

    def test_rows_are_those_of_the_tables(self):
        y = dict(zip(zip(self.kind, self.block["ROWS"]["name"]), self.block["Y"]))
        coefficients = dict(zip(table(self.folder, "standardisation.ecsv")["parameter"],
                                table(self.folder, "standardisation.ecsv")["value"]))
        sample = {row["supernova"]: row for row in table(self.folder, "sample.ecsv")}
        given = Table.read(path(self.folder, "data", "calibrators.ecsv"))
        used = 0
        self.assertLess(len(set(given["host"])), len(given))
        for row in given:
            if ("calibrator", row["supernova"]) not in y:
                continue
            used += 1
            one = sample[row["supernova"]]
            standardised = (one["m_b"] + coefficients["alpha"] * (one["s"] - 1) - coefficients["beta"] * one["c"]
                            + coefficients["gamma"] * (one["host_mass_probability"] - 0.5))
            self.assertAlmostEqual(y["calibrator", row["supernova"]], standardised, delta=1e-9)
            self.assertAlmostEqual(y["host", row["host"]], row["distance_modulus"], delta=1e-12)
        self.assertEqual(used, self.join["calibrators"]["value"])
        hosts = {row["host"] for row in given if ("calibrator", row["supernova"]) in y}
        self.assertEqual(len(hosts), self.join["hosts"]["value"])
        self.assertEqual(len(hosts), (self.kind == "host").sum())
        standardised = table(self.folder, "standardised.ecsv")
        standardised = standardised[np.asarray(standardised["used"])]
        flow = [y["hubble_flow", name] for name in standardised["supernova"]]
        np.testing.assert_allclose(flow, -5 * np.asarray(standardised["ab_single"]) - 25, atol=1e-9)
        self.assertEqual(len(flow), (self.kind == "hubble_flow").sum())

    def test_host_covariance_stands_in_it(self):
        given = Table.read(path(self.folder, "data", "host-covariance.ecsv"))
        image = dict(zip(self.block["MATRIX_PARTS"]["name"], self.block["MATRIX_PARTS"]["image"]))["host distances"]
        hosts = self.block["ROWS"]["name"][self.kind == "host"]
        order = [list(given["host"]).index(name) for name in hosts]
        matrix = np.array([[given[name][row] for name in hosts] for row in order])
        rows = np.flatnonzero(self.kind == "host")
        np.testing.assert_allclose(self.block[image.upper()][np.ix_(rows, rows)], matrix, atol=1e-12)

    def test_calibrators_stay_out_of_the_hubble_flow(self):
        names = set(Table.read(path(self.folder, "data", "calibrators.ecsv"))["supernova"])
        for name in ("magnitudes.ecsv", "standardised.ecsv", "influence.ecsv"):
            self.assertFalse(names & set(table(self.folder, name)["supernova"]), name)
        sample = table(self.folder, "sample.ecsv")
        mine = np.isin(sample["supernova"], list(names))
        np.testing.assert_array_equal(np.asarray(sample["calibrator"]), mine)
        self.assertFalse(np.asarray(sample["used"])[mine].any())
        self.assertEqual(set(sample["removed_by"][mine]), {"calibrator"})
        cuts = table(self.folder, "cuts.ecsv")
        self.assertEqual(cuts["left"][0] + cuts["removed_in_order"][0], (~mine).sum())

    def test_truth_comes_back(self):
        for name, truth in (("h0", H0), ("m_b", M_B)):
            row = self.join[name]
            self.assertLess(abs(row["value"] - truth), 3.5 * row["error"], name)
            self.assertGreater(row["error"], 0)

    def test_table_of_calibrators(self):
        rows = table(self.folder, "calibrators.ecsv")
        used = np.asarray(rows["used"])
        np.testing.assert_allclose(rows["absolute_magnitude"][used] - self.join["m_b"]["value"],
                                   rows["residual"][used], atol=1e-12)
        scatter = np.sqrt(np.mean(np.asarray(rows["residual"][used]) ** 2))
        self.assertAlmostEqual(scatter, self.join["calibrator_scatter"]["value"], delta=1e-12)
        self.assertTrue(all(bool(why) != use for why, use in zip(np.ma.filled(rows["why_not"], ""), used)))

    def test_summary_and_page(self):
        with open(path(self.folder, "results", "summary.json"), encoding="utf-8") as text:
            summary = json.load(text)
        self.assertEqual(summary["h0"]["value"], self.join["h0"]["value"])
        self.assertEqual(summary["absolute_magnitude"]["value"], self.join["m_b"]["value"])
        self.assertEqual(summary["join"]["calibrators"], self.join["calibrators"]["value"])
        self.assertAlmostEqual(sum(summary["join"]["shares"].values()), 1, delta=1e-9)
        self.assertIn("ladder-block.fits", summary["files"])
        done = run("summary", path(self.folder, "results"))
        self.assertRegex(done.stdout, r"M_B = −19\.\d+ ± 0\.\d+ mag, from \d calibrators")
        with open(path(self.folder, "results", "report.html"), encoding="utf-8") as text:
            self.assertIn('"id":"calibrators"', text.read())

    def test_larger_ladder_replaces_the_host_rows(self):
        rows = np.flatnonzero(self.kind != "host")
        hosts = np.flatnonzero(self.kind == "host")
        larger = dict(self.block)
        for name in ("C", "W"):
            matrix = self.block[name].copy()
            matrix[np.ix_(hosts, hosts)] = 1e-8 * np.eye(len(hosts))  # Moduli known almost exactly.
            larger[name] = matrix
        _, covariance, _ = solved(larger)
        k = self.names.index("five_log10_H0")
        self.assertLess(covariance[k, k], self.block["COVARIANCE_OF_PARAMETERS"][k, k])
        # Without any rows for the hosts the system has no answer.
        design = self.block["L"][rows]
        self.assertLess(np.linalg.matrix_rank(design), design.shape[1])

    def check_against_rerun(self, systematic, move):
        """The shifts of the calibrators against a run whose inputs `move` has changed on disk."""
        moved = copy_of(SURVEY)
        try:
            move(moved)
            finished(moved, JOIN)
            after, _ = block_of(moved)
        finally:
            shutil.rmtree(os.path.dirname(moved), ignore_errors=True)
        shift = self.block["SHIFTS"][list(self.block["SYSTEMATICS"]["name"]).index(systematic)]
        self.assertEqual(list(after["ROWS"]["name"]), list(self.block["ROWS"]["name"]))
        np.testing.assert_allclose(after["Y"] - self.block["Y"], shift, atol=3e-4)
        self.assertGreater(np.abs(shift[self.kind == "calibrator"]).max(), 2e-4)
        np.testing.assert_array_equal(shift[self.kind == "host"], 0)

    def test_zero_point_shift(self):
        self.check_against_rerun("zero point lark-g", lambda folder: move_zero_point(folder, "lark-g", 0.005))

    def test_reddening_shift(self):
        def move(folder):
            file = path(folder, "data", "supernovae", "larkspur.ecsv")
            rows = Table.read(file)
            rows["mw_ebv"] = 1.05 * rows["mw_ebv"]
            rows.write(file, format="ascii.ecsv", delimiter=",", overwrite=True)
        self.check_against_rerun("Milky Way reddening scale", move)

    def test_blind(self):
        """A blind run hides M_B and H0; errors, and differences between calibrators, are true."""
        folder = copy_of(SURVEY)
        try:
            output = finished(folder, JOIN, RUN)
            self.assertIn("[blind]", output)
            self.assertIn("a_B, M_B and H0 carry hidden constants", re.sub(r"\s+", " ", output))
            blind, header = block_of(folder)
            hidden = quantities(folder)
            finished(folder, JOIN)
            truth, _ = block_of(folder)
            seen = quantities(folder)
        finally:
            shutil.rmtree(os.path.dirname(folder), ignore_errors=True)
        self.assertTrue(header["BLIND"])
        moved = blind["Y"] - truth["Y"]
        kind = np.asarray(truth["ROWS"]["kind"])
        flow, near = moved[kind == "hubble_flow"], moved[kind == "calibrator"]
        np.testing.assert_allclose(flow, flow[0], atol=1e-9)
        np.testing.assert_allclose(near, near[0], atol=1e-9)
        self.assertNotAlmostEqual(flow[0], 0, places=4)
        self.assertNotAlmostEqual(near[0], flow[0], places=4)
        self.assertAlmostEqual(hidden["m_b"]["value"] - seen["m_b"]["value"], near[0], delta=1e-9)
        self.assertAlmostEqual(hidden["five_log10_h0"]["value"] - seen["five_log10_h0"]["value"], near[0] - flow[0],
                               delta=1e-9)
        self.assertAlmostEqual(hidden["five_log10_h0"]["error"], seen["five_log10_h0"]["error"], delta=1e-9)

    def test_same_bytes_for_any_number_of_threads(self):
        folder = copy_of(SURVEY)
        try:
            finished(folder, JOIN + SYSTEMATICS, OPEN.replace("blind = false", "blind = false\nthreads = 1"))
            one = contents(path(folder, "results"))
        finally:
            shutil.rmtree(os.path.dirname(folder), ignore_errors=True)
        whole = contents(path(self.folder, "results"))
        for name in ("ladder-block.fits", "join.ecsv", "calibrators.ecsv", "systematic-shifts.fits"):
            self.assertEqual(one[name], whole[name], name)

    def test_calibrator_with_a_bad_fit_is_left_out_and_said(self):
        folder = copy_of(SURVEY)
        name = Table.read(path(folder, "data", "calibrators.ecsv"))["supernova"][2]
        try:
            file = path(folder, "data", "lightcurves", "larkspur.ecsv")
            rows = Table.read(file)
            mine = np.flatnonzero(rows["supernova"] == name)
            rows.remove_rows(mine[4:])  # Too few epochs for the rules.
            rows.write(file, format="ascii.ecsv", delimiter=",", overwrite=True)
            output = finished(folder, JOIN)
            row = next(row for row in table(folder, "calibrators.ecsv") if row["supernova"] == name)
            count = quantities(folder)["calibrators"]["value"]
        finally:
            shutil.rmtree(os.path.dirname(folder), ignore_errors=True)
        self.assertFalse(row["used"])
        self.assertTrue(row["why_not"])
        self.assertEqual(count, self.join["calibrators"]["value"] - 1)
        self.assertIn(name, re.sub(r"\s+", " ", output))

    def test_few_calibrators_are_said(self):
        folder = copy_of(SURVEY)
        try:
            file = path(folder, "data", "calibrators.ecsv")
            rows = Table.read(file)[2:5]
            rows.write(file, format="ascii.ecsv", delimiter=",", overwrite=True)
            output = finished(folder, '[join]\ncalibrators = "data/calibrators.ecsv"\n')
        finally:
            shutil.rmtree(os.path.dirname(folder), ignore_errors=True)
        self.assertIn("Only 3 calibrators", re.sub(r"\s+", " ", output))


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-ladder-")
    try:
        SURVEY = make_survey(path(scratch, "survey"), 50, CALIBRATORS)
        FINISHED = copy_of(SURVEY)
        finished(FINISHED)
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
        if FINISHED:
            shutil.rmtree(os.path.dirname(FINISHED))
    sys.exit(0 if outcome.wasSuccessful() else 1)
