"""A small invented survey in a folder of its own, and the program to run on it; for the end-to-end tests.

THIRDRUNG_PROGRAM is the program, THIRDRUNG_TOOLS the folder of the test tools (set by ctest).
"""
import hashlib
import os
import shutil
import subprocess
import sys
import tempfile

PROGRAM = os.environ.get("THIRDRUNG_PROGRAM", "build/thirdrung")
TOOLS = os.environ.get("THIRDRUNG_TOOLS", "build/tools")

SIMULATION = """
seed = 7
[velocities]
sigma_v = 200
bulk_speed = 150
bulk_l = 280
bulk_b = 10
bulk_tabulated = true
%s
[[survey]]
name = "larkspur"
prefix = "Lark"
supernovae = %d
z_min = 0.02
z_max = 0.1
cadence = 5
passbands = [%s]
depth = [%s]
"""
BANDS = {"lark-b": 4550, "lark-g": 5550, "lark-r": 6600}

RUN = """
[run]
name = "larkspur"
output = "results"
[template]
file = "template.fits"
[passbands]
catalogue = "data/passbands/catalogue.toml"
[[survey]]
name = "larkspur"
photometry = "data/lightcurves/larkspur.ecsv"
supernovae = "data/supernovae/larkspur.ecsv"
[redshift]
velocity = "column"
"""


def make_survey(folder, count=40, more=""):
    """Template, run file and simulated tables in `folder`; `more` are keys of the simulated survey."""
    os.makedirs(folder, exist_ok=True)
    template = os.path.join(folder, "template.fits")
    subprocess.run([os.path.join(TOOLS, "make_template"), template], check=True)
    passbands = "".join(
        '[[passband]]\nid = "%s"\ncentre = %g\nwidth = 1000\nzero_point_error = 0.005\nwavelength_error = 5\n' % band
        for band in BANDS.items())
    with open(os.path.join(folder, "simulation.toml"), "w", encoding="utf-8") as out:
        out.write(SIMULATION % (passbands, count, ", ".join('"%s"' % band for band in BANDS),
                                ", ".join("21" for band in BANDS)) + more)
    done = run("simulate", os.path.join(folder, "simulation.toml"), "--template", template, "--to",
               os.path.join(folder, "data"))
    if done.returncode != 0:
        sys.exit("the simulation failed: " + done.stderr)
    write_run_file(folder)
    return folder


def write_run_file(folder, more="", text=RUN):
    path = os.path.join(folder, "run.toml")
    with open(path, "w", encoding="utf-8") as out:
        out.write(text + more)
    return path


def run(*arguments, **options):
    return subprocess.run([PROGRAM, *map(str, arguments)], capture_output=True, text=True, **options)


def copy_of(survey):
    """A fresh copy of a survey's folder, to damage."""
    folder = tempfile.mkdtemp(prefix="thirdrung-")
    target = os.path.join(folder, "run")
    shutil.copytree(survey, target)
    return target


def contents(folder):
    """Name and SHA-256 of every result in an output folder."""
    found = {}
    for root, folders, files in os.walk(folder):
        if "resume" in folders:
            folders.remove("resume")
        for name in files:
            path = os.path.join(root, name)
            with open(path, "rb") as content:
                found[os.path.relpath(path, folder)] = hashlib.sha256(content.read()).hexdigest()
    return found


def check_refused(test, folder, code, words, command="run"):
    """The command fails with the code and one sentence with all the words, and leaves no result; gives the sentence."""
    done = run(command, os.path.join(folder, "run.toml"))
    test.assertEqual(done.returncode, code, done.stderr + done.stdout)
    lines = done.stderr.strip().split("\n")
    test.assertEqual(len(lines), 1, done.stderr)
    for word in words:
        test.assertIn(word, lines[0])
    test.assertEqual(done.stdout, "")
    results = os.path.join(folder, "results")
    if os.path.isdir(results):
        test.assertEqual([name for name in contents(results) if not name.startswith(".")], [])
    return lines[0]


def move_zero_point(folder, passband, magnitudes):
    """Gives a passband of the survey's catalogue that offset, in place of what it may have."""
    catalogue = os.path.join(folder, "data", "passbands", "catalogue.toml")
    with open(catalogue, encoding="utf-8") as text:
        entries = text.read().split("[[passband]]")
    for i, entry in enumerate(entries):
        if '"%s"' % passband in entry:
            kept = [line for line in entry.split("\n") if not line.startswith("ab_offset")]
            entries[i] = "\n".join(kept).rstrip("\n") + "\nab_offset = %g\n\n" % magnitudes
    with open(catalogue, "w", encoding="utf-8") as out:
        out.write("[[passband]]".join(entries))
