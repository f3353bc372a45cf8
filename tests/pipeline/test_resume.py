"""A run gives the same bytes for any number of threads, after a kill at any moment, and after being asked to stop; what
has not changed is kept, and inputs that changed are not mixed with old results.
"""
import json
import os
import shutil
import signal
import subprocess
import sys
import tempfile
import time
import unittest

from pipeline.small_run import PROGRAM, RUN, contents, copy_of, make_survey, run, write_run_file

SURVEY = None
REFERENCE = None


def path(folder, *parts):
    return os.path.join(folder, *parts)


def start(folder):
    return subprocess.Popen([PROGRAM, "run", path(folder, "run.toml"), "--threads", "1"], stdout=subprocess.PIPE,
                            stderr=subprocess.PIPE, text=True)


def chunks(folder, stem="lightcurves-"):
    resume = path(folder, "results", "resume")
    return len([n for n in os.listdir(resume) if n.startswith(stem)]) if os.path.isdir(resume) else 0


class Resume(unittest.TestCase):
    def setUp(self):
        self.folder = copy_of(SURVEY)

    def tearDown(self):
        shutil.rmtree(os.path.dirname(self.folder), ignore_errors=True)

    def results(self):
        return contents(path(self.folder, "results"))

    def stop_with(self, which):
        """Starts the run and sends the signal once some light curves are saved; true if it came in time."""
        going = start(self.folder)
        while going.poll() is None and chunks(self.folder) == 0:
            time.sleep(0.001)
        going.send_signal(which)
        output, errors = going.communicate()
        return going.returncode, errors

    def finish(self):
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(self.results(), REFERENCE)

    def test_threads(self):
        for threads in (1, 2, 3):
            done = run("run", path(self.folder, "run.toml"), "--afresh", "--threads", threads)
            self.assertEqual(done.returncode, 0, done.stderr)
            self.assertEqual(self.results(), REFERENCE)

    def test_killed(self):
        code, errors = self.stop_with(signal.SIGKILL)
        self.assertEqual(code, -signal.SIGKILL)
        self.assertNotIn("summary.json", self.results())
        self.assertGreater(chunks(self.folder), 0)
        self.finish()
        self.assertEqual(chunks(self.folder), 0)

    def test_killed_again_and_again(self):
        for wait in (0.01, 0.03, 0.1, 0.2, 0.3, 0.4):
            going = start(self.folder)
            time.sleep(wait)
            going.kill()
            going.communicate()
        self.finish()

    def test_half_written_files_are_removed(self):
        os.makedirs(path(self.folder, "results", "resume"))
        gone = subprocess.Popen(["true"])
        gone.wait()
        left = [path(self.folder, "results", *where, ".unfinished-%d-table.ecsv" % gone.pid)
                for where in ((), ("resume",))]
        for file in left:
            with open(file, "w", encoding="utf-8") as out:
                out.write("half")
        self.finish()
        self.assertFalse([file for file in left if os.path.exists(file)])

    def test_asked_to_stop(self):
        code, errors = self.stop_with(signal.SIGINT)
        self.assertEqual(code, 130, errors)
        self.assertIn("goes on from there", errors)
        self.finish()

    def test_nothing_is_done_twice(self):
        self.finish()
        fits = path(self.folder, "results", "lightcurve-fits.ecsv")
        before = os.stat(fits).st_mtime_ns
        self.finish()
        self.assertEqual(os.stat(fits).st_mtime_ns, before)

    def test_changed_settings_redo_what_depends_on_them(self):
        self.finish()
        fits = path(self.folder, "results", "lightcurve-fits.ecsv")
        before = os.stat(fits).st_mtime_ns
        write_run_file(self.folder, "[cuts]\nc_max = 0.2\n")
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(os.stat(fits).st_mtime_ns, before)
        self.assertNotEqual(self.results()["sample.ecsv"], REFERENCE["sample.ecsv"])
        write_run_file(self.folder)
        self.finish()

    def test_changed_input_is_refused(self):
        self.finish()
        table = path(self.folder, "data", "lightcurves", "larkspur.ecsv")
        with open(table, encoding="utf-8") as text:
            lines = text.read().rstrip("\n").split("\n")
        with open(table, "w", encoding="utf-8") as out:
            out.write("\n".join(lines[:-1]) + "\n")
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 3)
        self.assertIn("larkspur.ecsv changed", done.stderr)
        self.assertIn("--afresh", done.stderr)
        self.assertEqual(self.results(), REFERENCE)
        done = run("run", path(self.folder, "run.toml"), "--afresh")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertNotEqual(self.results()["lightcurve-fits.ecsv"], REFERENCE["lightcurve-fits.ecsv"])

    def test_table_that_was_tampered_with_is_made_again(self):
        self.finish()
        with open(path(self.folder, "results", "sample.ecsv"), "a", encoding="utf-8") as out:
            out.write("# a line more\n")
        self.finish()

    def test_stages_one_by_one(self):
        for command in ("fit", "select", "standardise", "intercept"):
            done = run(command, path(self.folder, "run.toml"))
            self.assertEqual(done.returncode, 0, done.stderr)
        done = run("page", path(self.folder, "results"), "--title", "larkspur")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(self.results(), REFERENCE)
        done = run("standardise", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertNotIn("intercept.ecsv", self.results())

    def test_stage_without_the_one_before(self):
        done = run("standardise", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 3)
        self.assertIn("thirdrung select", done.stderr)

    def test_blind(self):
        def answer():
            with open(path(self.folder, "results", "summary.json"), encoding="utf-8") as text:
                return json.load(text)["a_b"]
        self.finish()
        true = answer()
        self.assertFalse(true["blind"])
        text = RUN.replace("[run]", '[run]\nblind = true\nphrase = "a rainy week"')
        write_run_file(self.folder, text=text)
        self.assertEqual(run("run", path(self.folder, "run.toml")).returncode, 0)
        blind = answer()
        self.assertTrue(blind["blind"])
        offset = blind["value"] - true["value"]
        self.assertGreater(abs(offset), 0)
        self.assertLessEqual(abs(offset), 0.02)
        self.assertEqual(blind["error"], true["error"])
        with open(path(self.folder, "results", "report.html"), encoding="utf-8") as page:
            self.assertNotIn("%.10f" % true["value"], page.read())
        done = run("unblind", path(self.folder, "run.toml"), "--by", "A. Nother")
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(run("run", path(self.folder, "run.toml")).returncode, 0)
        shown = answer()
        self.assertFalse(shown["blind"])
        self.assertAlmostEqual(shown["value"], true["value"], places=12)
        write_run_file(self.folder, "[cuts]\nc_max = 0.2\n", text=text)
        self.assertEqual(run("run", path(self.folder, "run.toml")).returncode, 0)
        with open(path(self.folder, "results", "provenance.json"), encoding="utf-8") as provenance:
            record = json.load(provenance)["unblinding"]
        self.assertEqual(record["by"], "A. Nother")
        self.assertTrue(record["run_file_changed_since"])


SYSTEMATICS = """
[[systematic]]
kind = "zero_point"
[[systematic]]
kind = "milky_way_scale"
[[systematic]]
kind = "velocity_scatter"
[[systematic]]
kind = "redshift"
"""


class ResumeSystematics(unittest.TestCase):
    """A run that is killed among its systematics goes on there, to the same bytes."""

    @classmethod
    def setUpClass(cls):
        cls.survey = copy_of(SURVEY)
        write_run_file(cls.survey, SYSTEMATICS)
        for command in ("fit", "select", "standardise"):
            done = run(command, path(cls.survey, "run.toml"))
            assert done.returncode == 0, done.stderr
        whole = copy_of(cls.survey)
        done = run("run", path(whole, "run.toml"))
        assert done.returncode == 0, done.stderr
        cls.reference = contents(path(whole, "results"))
        shutil.rmtree(os.path.dirname(whole))

    @classmethod
    def tearDownClass(cls):
        shutil.rmtree(os.path.dirname(cls.survey))

    def setUp(self):
        self.folder = copy_of(self.survey)

    def tearDown(self):
        shutil.rmtree(os.path.dirname(self.folder), ignore_errors=True)

    def saved(self):
        resume = path(self.folder, "results", "resume")
        return sorted(path(resume, name) for name in os.listdir(resume) if name.startswith("shift-"))

    def stop_with(self, which, count):
        going = start(self.folder)
        while going.poll() is None and chunks(self.folder, "shift-") < count:
            time.sleep(0.001)
        going.send_signal(which)
        going.communicate()
        return going.returncode

    def finish(self):
        done = run("run", path(self.folder, "run.toml"))
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(contents(path(self.folder, "results")), self.reference)
        self.assertEqual(self.saved(), [])

    def test_killed(self):
        self.assertEqual(self.stop_with(signal.SIGKILL, 2), -signal.SIGKILL)
        self.assertNotIn("systematic-shifts.fits", contents(path(self.folder, "results")))
        before = {file: os.stat(file).st_mtime_ns for file in self.saved()}
        self.assertGreaterEqual(len(before), 2)
        self.assertEqual(self.stop_with(signal.SIGINT, len(before) + 1), 130)
        for file, when in before.items():
            self.assertEqual(os.stat(file).st_mtime_ns, when)
        self.finish()

    def test_damaged_and_foreign_shifts_are_found_again(self):
        self.stop_with(signal.SIGKILL, 2)
        first, second = self.saved()[:2]
        shutil.copy(first, second)
        with open(first, "wb") as out:
            out.write(b"SIMPLE")
        self.finish()

    def test_what_is_saved_stays_when_a_systematic_is_added(self):
        self.stop_with(signal.SIGKILL, 2)
        before = {file: os.stat(file).st_mtime_ns for file in self.saved()}
        write_run_file(self.folder, SYSTEMATICS + '[[systematic]]\nkind = "q0"\n')
        self.stop_with(signal.SIGKILL, len(before) + 1)
        for file, when in before.items():
            self.assertEqual(os.stat(file).st_mtime_ns, when)
        write_run_file(self.folder, SYSTEMATICS)
        self.finish()


if __name__ == "__main__":
    scratch = tempfile.mkdtemp(prefix="thirdrung-survey-")
    try:
        SURVEY = make_survey(path(scratch, "survey"), 300)
        whole = copy_of(SURVEY)
        done = run("run", path(whole, "run.toml"))
        if done.returncode != 0:
            sys.exit("the run failed: " + done.stderr)
        REFERENCE = contents(path(whole, "results"))
        shutil.rmtree(os.path.dirname(whole))
        outcome = unittest.main(exit=False).result
    finally:
        shutil.rmtree(scratch)
    sys.exit(0 if outcome.wasSuccessful() else 1)
