"""Choices of a run file against what a rerun with another choice gives: the scatter of velocities as a systematic, and
the correction for a survey's magnitude limit.
"""
import csv
import json
import os
import shutil
import sys
import tempfile
import unittest

from pipeline.small_run import RUN, copy_of, make_survey, run, write_run_file

SURVEY = None
SELECTION = """
[[selection]]
surveys = ["larkspur"]
magnitude_limit = %g
width = 0.3
"""


def table(folder, name):
    with open(os.path.join(folder, "results", name + ".ecsv"), encoding="utf-8") as text:
        return list(csv.DictReader(line for line in text if not line.startswith("#")))


class Choices(unittest.TestCase):
    def setUp(self):
        self.folder = copy_of(SURVEY)

    def tearDown(self):
        shutil.rmtree(os.path.dirname(self.folder), ignore_errors=True)

    def a_b(self, more="", text=RUN):
        """Runs, and gives a_B; the light curves are kept from before."""
        done = run("run", write_run_file(self.folder, more, text=text), "--no-page")
        self.assertEqual(done.returncode, 0, done.stderr)
        return next(float(row["value"]) for row in table(self.folder, "intercept") if row["quantity"] == "a_b")

    def contribution(self, source):
        return next(float(row["ab_contribution"]) for row in table(self.folder, "budget") if row["source"] == source)

    def error_factor(self, passband):
        row = next(row for row in table(self.folder, "error-factors") if row["passband"] == passband)
        return float(row["error_factor"]), float(row["error_factor_error"])

    def warned_of_errors(self):
        with open(os.path.join(self.folder, "results", "summary.json"), encoding="utf-8") as text:
            return [line for line in json.load(text)["warnings"] if "scatter by more" in line]

    def test_errors_stated_too_small(self):
        photometry = os.path.join(self.folder, "data", "lightcurves", "larkspur.ecsv")
        with open(photometry, encoding="utf-8") as text:
            lines = text.read().split("\n")
        names = next(line for line in lines if not line.startswith("#")).split(",")
        for i, line in enumerate(lines):
            cells = line.split(",")
            if len(cells) == len(names) and cells[names.index("passband")] == "lark-g":
                cells[names.index("flux_error")] = "%.6g" % (float(cells[names.index("flux_error")]) / 1.6)
                lines[i] = ",".join(cells)
        with open(photometry, "w", encoding="utf-8") as text:
            text.write("\n".join(lines))
        shutil.rmtree(os.path.join(self.folder, "results"))
        key = 'supernovae = "data/supernovae/larkspur.ecsv"\n'
        self.a_b()
        found, error = self.error_factor("lark-g")
        self.assertLess(error, 0.1 * found)
        self.assertLess(abs(found - 1.6), 3.5 * error)
        self.assertEqual(len(self.warned_of_errors()), 1)
        self.assertIn("larkspur lark-g, errors too small", self.warned_of_errors()[0])
        errors = [float(row["flux_error"]) for row in table(self.folder, "lightcurve-points")
                  if row["passband"] == "lark-g"]
        self.a_b(text=RUN.replace(key, key + "error_scale = {lark-g = 1.6}\n"))
        scaled = [float(row["flux_error"]) for row in table(self.folder, "lightcurve-points")
                  if row["passband"] == "lark-g"]
        self.assertAlmostEqual(scaled[0], 1.6 * errors[0], delta=1e-6 * scaled[0])
        for passband in ("lark-b", "lark-g", "lark-r"):
            found, error = self.error_factor(passband)
            self.assertLess(abs(found - 1), 3.5 * error)
        self.assertEqual(self.warned_of_errors(), [])

    def test_velocity_scatter(self):
        before, after = (self.a_b(text=RUN + "sigma_v = %d\n" % v) for v in (250, 350))
        with_it = self.a_b('[[systematic]]\nkind = "velocity_scatter"\nsize = 100\n')
        self.assertAlmostEqual(with_it, before, delta=1e-12)
        self.assertGreater(abs(after - before), 1e-6)
        self.assertAlmostEqual(self.contribution("velocity scatter"), abs(after - before), delta=1e-9)

    def test_selection(self):
        plain = self.a_b()
        corrected = self.a_b(SELECTION % 18.3 + "[scans]\ncorrections = true\n")
        off = next(row for row in table(self.folder, "scans") if row["setting"] == "without selection")
        self.assertLess(corrected, plain - 0.001)
        # The row holds the coefficients, the rerun fits them again.
        self.assertAlmostEqual(float(off["delta_ab"]), plain - corrected, delta=0.3 * (plain - corrected))
        self.assertGreater(float(off["delta_ab_error"]), 0)
        biases = [float(row["selection_bias"]) for row in table(self.folder, "magnitudes")]
        self.assertLessEqual(max(biases), 0)
        self.assertLess(min(biases), -0.03)

    def test_limit_that_nothing_reaches(self):
        self.assertAlmostEqual(self.a_b(SELECTION % 25), self.a_b(), delta=1e-9)

    def test_selection_limit(self):
        limit = '[[systematic]]\nkind = "selection_limit"\nsize = 0.1\n'
        before, after = self.a_b(SELECTION % 18.3), self.a_b(SELECTION % 18.4)
        self.a_b(SELECTION % 18.3 + limit)
        self.assertAlmostEqual(self.contribution("magnitude limit"), abs(after - before), delta=0.1 * abs(after - before))


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-survey-")
    try:
        SURVEY = make_survey(os.path.join(scratch, "survey"), 60, "peak_limit = 18.3\npeak_limit_width = 0.3\n")
        done = run("fit", os.path.join(SURVEY, "run.toml"))
        if done.returncode != 0:
            sys.exit("the fits failed: " + done.stderr)
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
    sys.exit(0 if outcome.wasSuccessful() else 1)
