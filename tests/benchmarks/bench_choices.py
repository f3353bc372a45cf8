"""How long everything after the light-curve fits takes, and how much memory: systematics, intercept, scans.

    THIRDRUNG_PROGRAM=.build/release/thirdrung /usr/bin/python3 tests/benchmarks/bench_choices.py [small] [large]

small: 300 supernovae of four surveys, 60 systematics, all scans. large: 2 000 supernovae, the covariance of coherent
flows (full, 2 000 by 2 000), all scans. Both are simulated, and their light curves fitted, before the clock starts.
"""
import os
import resource
import subprocess
import sys
import tempfile
import time

PROGRAM = os.path.abspath(os.environ.get("THIRDRUNG_PROGRAM", ".build/release/thirdrung"))
TEMPLATE = os.path.abspath(os.path.join(os.path.dirname(__file__), "..", "..", "templates", "thirdrung-1.fits"))
SURVEYS = ("alder", "birch", "cedar", "damson")
BANDS = {"u": 4300, "g": 5000, "v": 5500, "r": 6300, "i": 7000}


def simulation(count):
    text = "seed = 11\n[velocities]\nsigma_v = 250\nbulk_speed = 200\nbulk_l = 280\nbulk_b = 10\nbulk_tabulated = true\n"
    for survey in SURVEYS:
        for band, centre in BANDS.items():
            text += ('[[passband]]\nid = "%s-%s"\ncentre = %d\nwidth = 900\nzero_point_error = 0.005\n'
                     "wavelength_error = 6\n" % (survey, band, centre))
    for survey in SURVEYS:
        text += ('[[survey]]\nname = "%s"\nprefix = "%s"\nsupernovae = %d\nz_min = 0.012\nz_max = 0.19\ncadence = 5\n'
                 "passbands = [%s]\ndepth = [%s]\n" % (
                     survey, survey, count // len(SURVEYS), ", ".join('"%s-%s"' % (survey, band) for band in BANDS),
                     ", ".join("22.5" for _ in BANDS)))
    return text


def run_file(systematics, flows):
    text = ('[run]\nname = "benchmark"\noutput = "results"\n[template]\nfile = "%s"\n[passbands]\n'
            'catalogue = "data/passbands/catalogue.toml"\n[redshift]\nvelocity = "column"\n[scans]\nall = true\n'
            "[report]\nlight_curves = false\n" % TEMPLATE)
    for survey in SURVEYS:
        text += ('[[survey]]\nname = "%s"\nphotometry = "data/lightcurves/%s.ecsv"\n'
                 'supernovae = "data/supernovae/%s.ecsv"\n' % (survey, survey, survey))
    if flows:
        text += "[intercept]\nvelocity_covariance = true\n"
    # 20 zero points, 20 wavelengths, and 20 of other kinds.
    kinds = ["zero_point", "wavelength", "milky_way_zero", "dust_law", "velocity_strength", "velocity_scatter",
             "sun_motion", "mass_step", "mass_offset", "population", "q0", "j0"]
    lines = ['kind = "%s"' % kind for kind in kinds] + ['kind = "velocity_source"\nvelocity = "infall"']
    lines += ['kind = "milky_way_scale"\nsurveys = ["%s"]' % survey for survey in SURVEYS]
    lines += ['kind = "redshift"\nsurveys = ["%s"]' % survey for survey in SURVEYS[:3]]
    lines += ['kind = "redshift"\nname = "common redshift offset"\nsize = 2e-5',
              'kind = "milky_way_scale"\nname = "common reddening scale"']
    if systematics:
        text += "".join("[[systematic]]\n%s\n" % line for line in lines)
    return text


def timed(*arguments):
    before, start = resource.getrusage(resource.RUSAGE_CHILDREN), time.perf_counter()
    child = subprocess.Popen([PROGRAM, *arguments], stdout=subprocess.DEVNULL, stderr=subprocess.PIPE, text=True)
    peak = 0
    while child.poll() is None:
        try:
            with open("/proc/%d/status" % child.pid, encoding="ascii") as status:
                peak = max([peak] + [int(line.split()[1]) for line in status if line.startswith("VmHWM")])
        except OSError:
            pass
        time.sleep(0.02)
    wall, after = time.perf_counter() - start, resource.getrusage(resource.RUSAGE_CHILDREN)
    if child.returncode != 0:
        sys.exit("%s failed: %s" % (" ".join(arguments), child.stderr.read()))
    return wall, after.ru_utime - before.ru_utime + after.ru_stime - before.ru_stime, peak / 1024


def rows(table):
    with open(table, encoding="utf-8") as text:
        return sum(not line.startswith("#") for line in text) - 1


def benchmark(name, count, systematics, flows):
    with tempfile.TemporaryDirectory(prefix="thirdrung-benchmark-") as folder:
        def path(*parts):
            return os.path.join(folder, *parts)
        for file, text in (("simulation.toml", simulation(count)), ("run.toml", run_file(systematics, flows))):
            with open(path(file), "w", encoding="utf-8") as out:
                out.write(text)
        timed("simulate", path("simulation.toml"), "--template", TEMPLATE, "--to", path("data"))
        print("%s: %d supernovae%s%s" % (name, count, ", 60 systematics" if systematics else "",
                                         ", full covariance" if flows else ""))
        fits = timed("fit", path("run.toml"))
        print("  %-12s %7.1f s  (%.1f s of processor)  %5.0f MB, not counted below" % ("fit", *fits), flush=True)
        total = [0.0, 0.0, 0.0]
        for stage in ["select", "standardise"] + (["shift"] if systematics else []) + ["intercept", "scan"]:
            wall, processor, memory = timed(stage, path("run.toml"))
            print("  %-12s %7.1f s  (%.1f s of processor)  %5.0f MB" % (stage, wall, processor, memory), flush=True)
            total = [total[0] + wall, total[1] + processor, max(total[2], memory)]
        print("  %-12s %7.1f s  (%.1f s of processor)  %5.0f MB" % ("together", *total), flush=True)
        print("  rows: %d magnitudes, %d in the budget, %d in the scans, %d in their grid" % tuple(
            rows(path("results", name + ".ecsv")) for name in ("magnitudes", "budget", "scans", "zrange-grid")))


if __name__ == "__main__":
    wanted = sys.argv[1:] or ["small", "large"]
    if "small" in wanted:
        benchmark("small", 300, True, False)
    if "large" in wanted:
        benchmark("large", 2000, False, True)
