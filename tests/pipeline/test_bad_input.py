"""Every kind of bad input gets one sentence that names file, row and column, the documented exit code, and leaves no
result behind; one bad supernova among many is set aside with its reason and the run goes on.
"""
import json
import os
import re
import shutil
import subprocess
import sys
import tempfile
import unittest

import numpy as np
from astropy.io import fits

from pipeline.small_run import RUN, check_refused, contents, copy_of, make_survey, run, write_run_file

SURVEY = None


def path(folder, *parts):
    return os.path.join(folder, *parts)


def edit(file, change):
    """Passes the lines of a text file through `change`."""
    with open(file, encoding="utf-8") as text:
        lines = text.read().split("\n")
    with open(file, "w", encoding="utf-8") as out:
        out.write("\n".join(change(lines)))


def header_end(lines):
    """Number of the line of column names."""
    return next(i for i, line in enumerate(lines) if not line.startswith("#"))


def set_cells(file, column, value, rows):
    """Puts `value` into a column at rows that `rows` (number from 1, cells by name) is true for."""
    def change(lines):
        start = header_end(lines)
        names = lines[start].split(",")
        for i in range(start + 1, len(lines)):
            if not lines[i]:
                continue
            cells = lines[i].split(",")
            if rows(i - start, dict(zip(names, cells))):
                cells[names.index(column)] = value
                lines[i] = ",".join(cells)
        return lines
    edit(file, change)


class BadInput(unittest.TestCase):
    def setUp(self):
        self.folder = copy_of(SURVEY)
        self.photometry = path(self.folder, "data", "lightcurves", "larkspur.ecsv")
        self.supernovae = path(self.folder, "data", "supernovae", "larkspur.ecsv")

    def tearDown(self):
        shutil.rmtree(os.path.dirname(self.folder), ignore_errors=True)

    def refused(self, code, *words, command="run"):
        """The command fails with the code and one sentence with all the words, and leaves no result."""
        return check_refused(self, self.folder, code, words, command)

    def set_aside(self, supernova, *words):
        """The run goes on without that one supernova, and says why."""
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        with open(path(self.folder, "results", "set-aside.ecsv"), encoding="utf-8") as text:
            rows = [line for line in text if line.startswith(supernova + ",")]
        self.assertEqual(len(rows), 1, rows)
        for word in words:
            self.assertIn(word, rows[0])
        with open(path(self.folder, "results", "sample.ecsv"), encoding="utf-8") as text:
            self.assertFalse([line for line in text if line.startswith(supernova + ",")])

    # Files.

    def test_missing_files(self):
        for key in ("photometry", "supernovae", "catalogue", "file"):
            text = re.sub(r'%s = ".*"' % key, '%s = "absent.ecsv"' % key, RUN)
            write_run_file(self.folder, text=text)
            for command in ("run", "check"):
                self.refused(3, "run.toml, row", "column " + key, "absent.ecsv", command=command)

    def test_missing_run_file(self):
        os.remove(path(self.folder, "run.toml"))
        self.refused(3, "run.toml")

    def test_variable_not_set(self):
        write_run_file(self.folder, text=RUN.replace('"data/lightcurves', '"${NO_SUCH_PLACE}/lightcurves'))
        self.refused(3, "run.toml, row", "column photometry", "NO_SUCH_PLACE")

    def test_truncated_fits(self):
        template = path(self.folder, "template.fits")
        with open(template, "rb") as content:
            whole = content.read()
        with open(template, "wb") as out:
            out.write(whole[: len(whole) // 2])
        self.refused(3, "template.fits")

    def test_not_utf8(self):
        for file in (self.photometry, path(self.folder, "run.toml")):
            with open(file, "rb") as content:
                whole = content.read()
            with open(file, "wb") as out:
                out.write(whole + b"\n# \xff\xfe\n")
            self.refused(3, os.path.basename(file), "UTF-8")
            with open(file, "wb") as out:
                out.write(whole)

    # Run file.

    def test_unknown_keys(self):
        for wrong, words in (("[cuts]\nc_maxx = 0.3\n", ("c_maxx", "c_max")),
                             ("[lightcurve]\nphase_mn = -5\n", ("phase_mn", "phase_min")),
                             ("[standardisaton]\nalpha = 1\n", ("standardisaton", "standardisation")),
                             ("[cuts]\nz_min = 0.02\n", ("z_min", "[intercept]"))):
            file = write_run_file(self.folder, wrong)
            line = RUN.count("\n") + (1 if "standardisaton" in wrong else 2)
            message = self.refused(3, "run.toml, row %d" % line, *words)
            self.assertIn(file, message)

    def test_values_of_the_wrong_kind(self):
        for wrong in ('[cuts]\nc_max = "small"\n', "[intercept]\nz_min = 0.2\n", '[redshift.sun]\nspeed = "fast"\n',
                      '[milky_way]\nlaw = "fitzpatrick"\n', "[run2\n", '[[systematic]]\nkind = "zeropoint"\n',
                      '[[systematic]]\nkind = "zero_point"\nsurveys = ["larkspurr"]\n'):
            text = RUN.replace('[redshift]\nvelocity = "column"\n', "") if "redshift" in wrong else RUN
            write_run_file(self.folder, wrong, text=text)
            self.refused(3, "run.toml, row")

    def test_systematic_of_unknown_passband(self):
        write_run_file(self.folder, '[[systematic]]\nkind = "zero_point"\npassbands = ["lark-q"]\n')
        for command in ("check", "run"):
            self.refused(3, "run.toml, row %d" % (RUN.count("\n") + 2), "lark-q", command=command)

    def test_error_scale_of_unknown_passband(self):
        key = 'supernovae = "data/supernovae/larkspur.ecsv"\n'
        text = RUN.replace(key, key + "error_scale = {lark-q = 1.2}\n")
        write_run_file(self.folder, text=text)
        row = text[:text.index("error_scale")].count("\n") + 1
        for command in ("check", "run"):
            self.refused(3, "run.toml, row %d" % row, "column error_scale", "lark-q", command=command)

    def test_systematic_of_unknown_survey(self):
        write_run_file(self.folder, '[[systematic]]\nkind = "redshift"\nsurveys = ["larkspurr"]\n')
        for command in ("check", "run"):
            self.refused(3, "run.toml, row %d" % (RUN.count("\n") + 3), "column surveys", "larkspurr",
                         "did you mean larkspur?", command=command)

    def test_selection(self):
        limit = "[[selection]]\nmagnitude_limit = 18\n"
        for wrong, words in (("[[selection]]\nwidth = 0.1\n", ("column magnitude_limit", "lacks")),
                             ("[[selection]]\nmagnitude_limit = 18\nsurveys = [\"lark\"]\n", ("column surveys", "lark")),
                             (limit + limit, ("column surveys", "larkspur", "keep one")),
                             ('[[systematic]]\nkind = "selection_limit"\n', ("column kind", "[[selection]]"))):
            write_run_file(self.folder, wrong)
            self.refused(3, "run.toml", *words)

    # Tables.

    def test_units(self):
        def take_out(lines):
            return [line.replace(", unit: uJy", "") if "name: flux," in line else line for line in lines]
        edit(self.photometry, take_out)
        self.refused(3, "larkspur.ecsv", "column flux", "unit")
        shutil.copy(path(SURVEY, "data", "lightcurves", "larkspur.ecsv"), self.photometry)
        edit(self.photometry, lambda lines: [line.replace("unit: uJy", "unit: mag") for line in lines])
        self.refused(3, "larkspur.ecsv", "column flux", "mag")

    def test_missing_column(self):
        edit(self.photometry, lambda lines: [line.replace("mjd", "date") for line in lines])
        self.refused(3, "larkspur.ecsv", "mjd")

    def test_curve_that_does_not_increase(self):
        curves = path(self.folder, "data", "passbands")
        curve = next(name for name in sorted(os.listdir(curves)) if name.endswith(".ecsv"))

        def swap(lines):
            start = header_end(lines)
            lines[start + 3], lines[start + 4] = lines[start + 4], lines[start + 3]
            return lines
        edit(path(curves, curve), swap)
        self.refused(3, curve, "row")

    def test_unknown_passband_everywhere(self):
        set_cells(self.photometry, "passband", "lark-q", lambda row, cells: True)
        self.refused(3, "larkspur.ecsv, row 1, column passband", "lark-q")

    def test_one_name_for_two_objects(self):
        for folder in ("lightcurves", "supernovae"):
            shutil.copy(path(self.folder, "data", folder, "larkspur.ecsv"), path(self.folder, "data", folder, "teal.ecsv"))
        write_run_file(self.folder, '[[survey]]\nname = "teal"\nphotometry = "data/lightcurves/teal.ecsv"\n'
                                    'supernovae = "data/supernovae/teal.ecsv"\n')
        set_cells(path(self.folder, "data", "supernovae", "teal.ecsv"), "dec", "-89.5",
                  lambda row, cells: cells["supernova"] == "Lark-003")
        for command in ("check", "run"):
            self.refused(3, "teal.ecsv, row 3, column supernova", "Lark-003", "not one supernova", command=command)

    def test_velocity_field_that_does_not_cover(self):
        def write_field(edge):
            axis = np.linspace(-edge, edge, 9)
            header = fits.Header({"BUNIT": "km/s", "VFRAME": "CMB", "VAXES": "GALACTIC", "VSPACE": "REAL"})
            for n in "123":
                header.update({"CUNIT" + n: "Mpc/h", "CRPIX" + n: 1.0, "CRVAL" + n: axis[0],
                               "CDELT" + n: axis[1] - axis[0]})
            fits.writeto(path(self.folder, "field.fits"), np.full((9, 9, 9), 100, "f4"), header, overwrite=True)
        text = RUN.replace('velocity = "column"', 'velocity = "grid"\nvelocity_field = "field.fits"')
        write_run_file(self.folder, text=text)
        write_field(170)
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        with open(path(self.folder, "results", "summary.json"), encoding="utf-8") as content:
            warnings = json.load(content)["warnings"]
        self.assertTrue([w for w in warnings if re.match("[0-9]+ of [0-9]+ supernovae lie outside the velocity", w)])
        shutil.rmtree(path(self.folder, "results"))
        write_field(5)
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 3, done.stderr)
        self.assertEqual(len(done.stderr.strip().split("\n")), 1, done.stderr)
        self.assertIn("field.fits: covers none of the supernovae", done.stderr)

    # One bad supernova among many.

    def test_bad_measurements(self):
        for column, value, words in (("passband", "lark-q", ("column passband", "lark-q")),
                                     ("flux", "nan", ("column flux",)),
                                     ("flux_error", "-1", ("column flux_error",)),
                                     ("flux_error", "nan", ("column flux_error",)),
                                     ("mjd", "", ("column mjd",))):
            shutil.copy(path(SURVEY, "data", "lightcurves", "larkspur.ecsv"), self.photometry)
            shutil.rmtree(path(self.folder, "results"), ignore_errors=True)
            hit = []

            def third_of_five(row, cells):
                if cells["supernova"] != "Lark-005":
                    return False
                hit.append(row)
                return len(hit) == 3
            set_cells(self.photometry, column, value, third_of_five)
            self.set_aside("Lark-005", "larkspur.ecsv", "row %d" % hit[2], *words)

    def test_bad_supernovae(self):
        for column, value, words in (("z_helio", "", ("z_helio",)), ("z_helio", "-0.01", ("z_helio",)),
                                     ("z_helio", "0", ("z_helio",)), ("z_helio", "17", ("z_helio",)),
                                     ("dec", "123", ("dec",)), ("mw_ebv", "", ("mw_ebv", "reddening"))):
            shutil.copy(path(SURVEY, "data", "supernovae", "larkspur.ecsv"), self.supernovae)
            shutil.rmtree(path(self.folder, "results"), ignore_errors=True)
            set_cells(self.supernovae, column, value, lambda row, cells: cells["supernova"] == "Lark-007")
            done = run("run", path(self.folder, "run.toml"))
            self.assertEqual(done.returncode, 0, done.stderr)
            with open(path(self.folder, "results", "set-aside.ecsv"), encoding="utf-8") as text:
                row = next(line for line in text if line.startswith("Lark-007,"))
            self.assertTrue(any(word in row for word in words), row)

    def test_supernova_listed_twice(self):
        def repeat(lines):
            start = header_end(lines)
            return lines[: start + 3] + [lines[start + 2]] + lines[start + 3:]
        edit(self.supernovae, repeat)
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 3, done.stderr)
        self.assertIn("larkspur.ecsv, row 3", done.stderr)
        self.assertIn("twice", done.stderr)

    # Output.

    def test_output_that_cannot_be_written(self):
        with open(path(self.folder, "blocked"), "w", encoding="utf-8") as out:
            out.write("a file, not a folder")
        write_run_file(self.folder, text=RUN.replace('output = "results"', 'output = "blocked/results"'))
        for command in ("run", "check"):
            done = run(command, path(self.folder, "run.toml"))
            self.assertEqual(done.returncode, 4, done.stderr)
            self.assertIn("blocked", done.stderr)

    def test_full_disk(self):
        place = tempfile.mkdtemp(prefix="thirdrung-disk-")
        mounted = subprocess.run(["mount", "-t", "tmpfs", "-o", "size=300k", "tmpfs", place], capture_output=True)
        if mounted.returncode != 0:
            os.rmdir(place)
            self.skipTest("a small disk can only be mounted by root")
        try:
            write_run_file(self.folder, text=RUN.replace('output = "results"', 'output = "%s/results"' % place))
            done = run("run", path(self.folder, "run.toml"))
            self.assertEqual(done.returncode, 4, done.stderr)
            self.assertEqual(len(done.stderr.strip().split("\n")), 1)
            self.assertIn(place, done.stderr)
            left = contents(path(place, "results"))
            self.assertFalse([name for name in left if name.startswith(".unfinished")], left)
            self.assertNotIn("summary.json", left)
        finally:
            subprocess.run(["umount", place], check=True)
            os.rmdir(place)

    def test_second_run_in_the_same_folder(self):
        os.makedirs(path(self.folder, "results", "resume"))
        lock = path(self.folder, "results", "resume", "in-use")
        holder = subprocess.Popen(["flock", lock, "sleep", "30"])
        try:
            for _ in range(100):
                if os.path.exists(lock) and subprocess.run(["flock", "-n", lock, "true"]).returncode != 0:
                    break
            done = run("run", path(self.folder, "run.toml"))
        finally:
            holder.terminate()
            holder.wait()
        self.assertEqual(done.returncode, 4, done.stderr)
        self.assertIn("another run", done.stderr)

    def test_too_few_left(self):
        write_run_file(self.folder, "[cuts]\nc_max = 0.0001\n")
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 5, done.stderr)
        self.assertIn("cuts.ecsv", done.stderr)

    def test_too_few_in_the_redshift_range(self):
        write_run_file(self.folder, "[intercept]\nz_min = 0.098\nz_max = 0.1\n")
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 5, done.stderr)
        self.assertEqual(len(done.stderr.strip().split("\n")), 1, done.stderr)
        self.assertIn("10 are needed", done.stderr)
        left = contents(path(self.folder, "results"))
        self.assertIn("cuts.ecsv", left)
        for name in ("magnitudes.ecsv", "intercept.ecsv", "summary.json"):
            self.assertNotIn(name, left)
        self.assertFalse([name for name in left if ".unfinished" in name], left)

    def test_output_without_permission(self):
        if os.geteuid() == 0:
            self.skipTest("nothing is forbidden to root")
        os.makedirs(path(self.folder, "results"))
        os.chmod(path(self.folder, "results"), 0o555)
        self.refused(4, "results", "cannot be")

    def test_command_line(self):
        self.assertEqual(run("run").returncode, 2)
        self.assertEqual(run("walk", "x").returncode, 2)
        self.assertEqual(run().returncode, 2)
        self.assertEqual(run("--help").returncode, 0)


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-survey-")
    try:
        SURVEY = make_survey(path(scratch, "survey"))
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
    sys.exit(0 if outcome.wasSuccessful() else 1)
