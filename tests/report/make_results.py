"""Writes plausible result tables of a run, of invented supernovae, to test the report on.

usage: make_results.py FOLDER COUNT [--without TABLE]... [--blind] [--plain]

--plain leaves out the names that are hard on a page (markup, quotes, very long).

Standard library only, so that 3 000 supernovae with light curves (a million rows) are written in seconds.
The numbers are drawn from the model that the program fits (stretch and colour populations, a magnitude-redshift
relation with scatter), so that the charts look like those of a real run. Same seed, same bytes.
"""
import json
import math
import os
import random
import sys

HOSTILE = [
    "<script>alert(1)</script>",
    "O'Brien \"quoted\" & <b>bold</b>",
    "Æther-ß Ωmega 超新星",
    "SN-with-a-very-long-name-" + "that-goes-on-" * 9 + "and-ends",
    "</script><img src=x onerror=alert(2)>",
    "comma, semicolon; back\\slash 'tick' `grave` ${1+1}",
]
SURVEYS = ["Harbour", "Lantern", "Quarry Deep", "Ångmoor", "Seven Dials"]
BANDS = {"Harbour": "Bgri", "Lantern": "griz", "Quarry Deep": "riz", "Ångmoor": "BVRI", "Seven Dials": "gri"}
ALPHA, BETA, GAMMA, SIGMA_INT, AB = 1.32, 3.05, 0.046, 0.098, 0.71448


def quote(value):
    if isinstance(value, bool):
        return "True" if value else "False"
    if isinstance(value, float):
        return "" if math.isnan(value) else "%.10g" % value
    if isinstance(value, int):
        return str(value)
    return '"' + value.replace('"', '""') + '"'


def write(folder, name, columns, rows):
    """columns: list of (name, unit, type)."""
    with open(os.path.join(folder, name), "w", encoding="utf-8") as out:
        out.write("# %ECSV 1.0\n# ---\n# delimiter: ','\n# datatype:\n")
        for column, unit, kind in columns:
            unit_text = ", unit: %s" % unit if unit else ""
            out.write("# - {name: %s%s, datatype: %s}\n" % (column, unit_text, kind))
        out.write("# schema: astropy-2.0\n" + ",".join(c[0] for c in columns) + "\n")
        for row in rows:
            out.write(",".join(map(quote, row)) + "\n")


def spec(text):
    kinds = {"f": "float64", "i": "int64", "t": "string", "b": "bool"}
    result = []
    for item in text.split():
        parts = item.split(":")
        result.append((parts[0], parts[2] if len(parts) > 2 else "", kinds[parts[1]]))
    return result


def shape(phase, s, band):
    """Flux against phase, peak one: a rise, a fall, and a second bump in the red."""
    p = phase / s
    if p < -18:
        return 0.0
    rise = ((p + 18) / 18) ** 2 if p < 0 else 1.0
    fall = 1.0 if p < 0 else math.exp(-(p / 17.0) ** 1.3) * 0.93 + 0.07 * math.exp(-p / 60)
    bump = 0.28 * math.exp(-((p - 24) / 8.5) ** 2) if band in "iIz" else 0.0
    return rise * fall + bump


def magnitude(z, residual=0.0):
    expansion = 299792.458 * z * (1 + 0.775 * z - (1 + 0.55 - 3 * 0.3025 + 1) * z * z / 6)
    return 5 * (math.log10(expansion) - AB) + residual


def main():
    folder, count = sys.argv[1], int(sys.argv[2])
    without = {sys.argv[i + 1] for i, word in enumerate(sys.argv) if word == "--without"}
    blind = "--blind" in sys.argv
    rng = random.Random(20240607)
    os.makedirs(folder, exist_ok=True)
    fits, points, curves, sample, standardised, influence = [], [], [], [], [], []
    removed = {"z_flow in (0.0233, 0.15)": 0, "|c| < 0.3": 0, "0.6 < s < 1.3": 0, "first phase < 5 d": 0, "fit probability > 0.001": 0}
    alone = dict.fromkeys(removed, 0)
    residuals = []
    for n in range(count):
        name = HOSTILE[n] if n < len(HOSTILE) and "--plain" not in sys.argv else "SN %d%s" % (2003 + n % 19, "".join(rng.choice("abcdefghijkmnpqrstuvwxyz") for _ in range(3)) + str(n))
        survey = SURVEYS[min(int(rng.expovariate(0.7)), 4)]
        z = 0.018 + 0.14 * rng.random() ** 1.25
        s, c = rng.gauss(0.97, 0.09), rng.gauss(-0.02, 0.05) + rng.expovariate(14)
        mass = rng.gauss(10.3, 0.7)
        offset = rng.gauss(0, SIGMA_INT)
        se, ce, me = 0.015 + 0.03 * rng.random(), 0.015 + 0.02 * rng.random(), 0.02 + 0.03 * rng.random()
        pmass = 0.5 * (1 + math.erf((mass - 10) / 0.15 / math.sqrt(2)))
        m_true = magnitude(z, offset) - ALPHA * (s - 1) + BETA * c - GAMMA * (pmass - 0.5)
        m, s_fit, c_fit = m_true + rng.gauss(0, me), s + rng.gauss(0, se), c + rng.gauss(0, ce)
        t0 = 56000.0 + 2500 * rng.random()
        first, last = -13 + 18 * rng.random() ** 1.6, 30 + 25 * rng.random()
        ra, dec = 360 * rng.random(), math.degrees(math.asin(rng.uniform(-0.85, 1)))
        vpec = 180 * math.cos(math.radians(ra - 200)) * math.cos(math.radians(dec))
        rules = []
        probability = rng.random() if rng.random() > 0.03 else 1e-5
        if not 0.0233 < z < 0.15: rules.append("z_flow in (0.0233, 0.15)")
        if abs(c_fit) >= 0.3: rules.append("|c| < 0.3")
        if not 0.6 < s_fit < 1.3: rules.append("0.6 < s < 1.3")
        if first > 5 - 1.5: rules.append("first phase < 5 d")
        if probability <= 0.001: rules.append("fit probability > 0.001")
        for rule in rules:
            alone[rule] += 1
        if rules:
            removed[rules[0]] += 1
        bands = BANDS[survey]
        bad_epochs = 0
        noise = 0.02 + 1.2 * z * z
        epochs = 0
        for b, band in enumerate(bands):
            zero = m_true + c * (0.8 - 0.5 * b) + 0.1 * b
            peak = 3631e6 * 10 ** (-0.4 * zero)
            passband = survey.split()[0].lower() + "_" + band
            phase = first + 0.7 * rng.random()
            while phase < last:
                model = peak * shape(phase, s, band)
                error = peak * noise * (0.5 + rng.random()) * (1.5 if band in "Bz" else 1)
                pull = rng.gauss(0, 1)
                bad = rng.random() < 0.012
                if bad:
                    pull += rng.choice((-6, 6)) * (0.8 + 0.5 * rng.random())
                    bad_epochs += 1
                points.append((name, survey, passband, t0 + phase * (1 + z), phase, model + pull * error, error, model, 0.03 * model, pull, 0.1 if bad else 1.0, bad))
                phase += (2.2 + 3.5 * rng.random()) / (1 + z)
                epochs += 1
            for day in range(int(math.floor(first)) - 4, int(last) + 5):
                model = peak * shape(day, s, band)
                curves.append((name, survey, passband, float(day), t0 + day * (1 + z), model, 0.03 * model + 0.002 * peak))
        dof = epochs - 4
        chi2 = dof + rng.gauss(0, 1) * math.sqrt(2 * dof)
        remarks = [] if probability > 0.001 else ["the template does not describe the data (fit probability 1e-05)"]
        if bad_epochs:
            remarks.append("%d epochs mistrusted" % bad_epochs)
        fits.append((name, survey, z, t0, 0.1 + 0.1 * rng.random(), m, me, s_fit, se, c_fit, ce, 0.001, 0.0005, 0.0002, 0.0, 0.0, 0.0,
                     chi2, dof, probability, ",".join(survey.split()[0].lower() + "_" + b for b in bands), epochs, first, last, 1.1 - 1.2 * (s_fit - 1),
                     "har_u: bluer than the template; har_y: no passband" if n % 17 == 3 else "", bad_epochs, probability > 0.001, "; ".join(remarks)))
        nomass = n % 23 == 5
        sample.append((name, survey, ra, dec, 0.0, 0.0, z * 1.001, z, vpec, z, 250 / 299792.458, 0.02 + 0.1 * rng.random() ** 2, math.nan if nomass else mass, math.nan if nomass else 0.15,
                       0.5 if nomass else pmass, m, me, s_fit, se, c_fit, ce, 0.0, 0.0, 0.0, probability, first, last, chi2, dof,
                       not rules, rules[0] if rules else "", "; ".join(rules)))
        if not rules:
            standard = m + ALPHA * (s_fit - 1) - BETA * c_fit + GAMMA * (pmass - 0.5)
            residual = standard - magnitude(z)
            error = math.sqrt(me ** 2 + (ALPHA * se) ** 2 + (BETA * ce) ** 2 + SIGMA_INT ** 2 + (5 / math.log(10) * 250 / 299792.458 / z) ** 2)
            residuals.append((name, residual, error))
            standardised.append((name, survey, z, standard, error, AB - 0.2 * residual, residual, error, 1 / error ** 2, abs(residual / error) > 3.2))
    total = sum(1 / e ** 2 for _, _, e in residuals)
    scatter = math.sqrt(sum(r * r for _, r, _ in residuals) / max(1, len(residuals)))
    for name, residual, error in residuals:
        share = 1 / error ** 2 / total
        influence.append((name, 0.2 * residual * share, 0.2 * error * share, share))
    tables = {
        "lightcurve-fits": ("supernova:t survey:t z_helio:f t_0:f:d t_0_error:f:d m_b:f:mag m_b_error:f:mag s:f s_error:f c:f:mag c_error:f:mag cov_t0_mb:f cov_t0_s:f cov_t0_c:f cov_mb_s:f cov_mb_c:f cov_s_c:f "
                            "chi2:f dof:i fit_probability:f bands_used:t epochs_used:i first_phase:f:d last_phase:f:d dm15_b:f:mag bands_left_out:t mistrusted_epochs:i trusted:b remarks:t", fits),
        "lightcurve-points": ("supernova:t survey:t passband:t mjd:f:d phase:f:d flux:f:uJy flux_error:f:uJy model_flux:f:uJy model_error:f:uJy pull:f weight:f mistrusted:b", points),
        "lightcurve-curves": ("supernova:t survey:t passband:t phase:f:d mjd:f:d model_flux:f:uJy model_error:f:uJy", curves),
        "sample": ("supernova:t surveys:t ra:f:deg dec:f:deg gal_l:f:deg gal_b:f:deg z_helio:f z_cmb:f v_pec:f:'km/s' z_flow:f z_flow_error:f mw_ebv:f:mag host_log_mass:f host_log_mass_error:f host_mass_probability:f "
                   "m_b:f:mag m_b_error:f:mag s:f s_error:f c:f:mag c_error:f:mag cov_mb_s:f cov_mb_c:f cov_s_c:f fit_probability:f first_phase:f:d last_phase:f:d chi2:f dof:i used:b removed_by:t removed_by_all:t", sample),
        "standardised": ("supernova:t survey:t z_flow:f m_b_standardised:f:mag m_b_standardised_error:f:mag ab_single:f residual:f:mag residual_error:f:mag weight:f chauvenet_mistrusted:b", standardised),
        "influence": ("supernova:t delta_ab:f delta_ab_error:f weight:f", influence),
    }
    left, cuts = count, []
    for rule in removed:
        left -= removed[rule]
        cuts.append((rule, alone[rule], removed[rule], left))
    tables["cuts"] = ("rule:t removed_alone:i removed_in_order:i left:i", cuts)
    n_used = len(residuals)
    stat = SIGMA_INT / 5 / math.sqrt(max(1, n_used)) * 1.35
    sys_error = 0.00153
    tables["standardisation"] = ("parameter:t value:f error:f", [
        ("alpha", ALPHA, 0.09), ("beta", BETA, 0.11), ("gamma", GAMMA, 0.017), ("sigma_int", SIGMA_INT, 0.009), ("s_mean", 0.971, 0.008), ("s_width", 0.0893, 0.006),
        ("c_mean", 0.0482, 0.006), ("c_width", 0.0861, 0.005), ("intercept", AB, stat)])
    lows, highs = [0.01, 0.015, 0.0233, 0.03, 0.04, 0.05, 0.06], [0.08, 0.1, 0.12, 0.15, 0.2]
    tables["zrange-grid"] = ("z_min:f z_max:f supernovae:i delta_ab:f delta_ab_error:f", [
        (lo, hi, int(n_used * (hi - lo) / 0.14), 0.0 if (lo, hi) == (0.0233, 0.15) else rng.gauss(0, 0.0012), 0.0 if (lo, hi) == (0.0233, 0.15) else 0.0006 + 0.001 * rng.random()) for lo in lows for hi in highs])
    scans = []
    for axis, settings in {"survey left out": SURVEYS, "velocity field": ["none", "infall model", "grid, β = 0.43"], "host-mass step at": ["9.8", "10.2", "10.5"],
                           "stretch range": ["0.7 to 1.2", "0.8 to 1.1"], "colour range": ["|c| < 0.15", "|c| < 0.2"], "first phase before": ["0 d", "-5 d"], "template": ["retrained without ultraviolet"],
                           "Milky Way dust": ["× 0.86", "Fitzpatrick (1999)"]}.items():
        for setting in settings:
            size = int(n_used * (0.5 + 0.5 * rng.random()))
            delta = rng.gauss(0, 0.0011)
            scans.append((axis, setting, size, AB + delta, stat * 1.1, delta, 0.0004 + 0.0012 * rng.random(), "fewer than 40 supernovae" if size < 40 else ""))
    tables["scans"] = ("scan:t setting:t supernovae:i a_b:f a_b_error:f delta_ab:f delta_ab_error:f caution:t", scans)
    tables["budget"] = ("source:t kind:t size:t ab_contribution:f mag_contribution:f h0_percent:f with_correlations:f", [
        (source, kind, size, v, 5 * v, 100 * math.log(10) * v, v) for source, kind, size, v in [
            ("finite sample and intrinsic scatter", "statistical", "%d supernovae" % n_used, stat * 0.9), ("peculiar velocities", "statistical", "250 km/s", stat * 0.42), ("Harbour zero points", "systematic", "0.010 mag", 0.00081),
            ("Lantern zero points", "systematic", "0.005 mag", 0.00049), ("passband wavelengths", "systematic", "5 Angstrom", 0.00037), ("template training", "systematic", "half the sample", 0.00074),
            ("Milky Way dust", "systematic", "5 %", 0.00028), ("host-mass step", "systematic", "0.02 mag", 0.00046), ("coherent flows", "systematic", "linear theory", 0.00071), ("expansion history", "systematic", "q0 ± 0.02", 0.00019)]])
    tables["calibration-derivatives"] = ("input:t unit:t d_ab:f", [(s.split()[0].lower() + "_" + b + " zero point", "per mag", rng.gauss(0, 0.02)) for s in SURVEYS for b in BANDS[s]])
    tables["fields"] = ("ra:f:deg dec:f:deg v_pec:f:'km/s'", [
        (ra, dec, 280 * math.cos(math.radians(ra - 190)) * math.cos(math.radians(dec + 12)) + 60 * math.sin(math.radians(3 * ra)) * math.cos(math.radians(dec)))
        for dec in range(-85, 90, 10) for ra in [360 * (k + 0.5) / max(1, round(36 * math.cos(math.radians(dec)))) for k in range(max(1, round(36 * math.cos(math.radians(dec)))))]])
    near = random.Random(11)
    hosts = ["Kestrel Down", "Hay & Ferry" if "--plain" in sys.argv else "<b>Hay</b> & \"Ferry\"", "Lintel 4", "Marrow Fold", "Ober 12", "Ober 12", "Tamsin's Cloud"]
    absolute = [-19.24 + near.gauss(0, 0.12) for _ in hosts]
    tables["calibrators"] = ("supernova:t host:t m_b_standardised:f:mag distance_modulus:f:mag distance_modulus_error:f:mag absolute_magnitude:f:mag absolute_magnitude_error:f:mag residual:f:mag used:b why_not:t", [
        ("Near-%03d" % (k + 1), host, 31 + 0.2 * k + m, 31 + 0.2 * k, 0.05, m if k != 3 else math.nan, 0.12 if k != 3 else math.nan, m + 19.24 if k != 3 else math.nan, k != 3, "" if k != 3 else "|c| < 0.3")
        for k, (host, m) in enumerate(zip(hosts, absolute))])
    tables["join"] = ("quantity:t value:f error:f", [("h0", 73.04, 1.9, ), ("m_b", -19.24, 0.045), ("correlation", 0.92, math.nan), ("calibrators", 6.0, math.nan)] + [
        ("share_of_" + side, share, math.nan) for side, share in (("calibrators", 0.71), ("hubble_flow", 0.11), ("coefficients", 0.05), ("systematics", 0.13))])
    poles = [(math.fmod(k * 137.508, 360), math.degrees(math.asin((k + 0.5) / 96))) for k in range(96)]
    tables["sky-halves"] = ("ra:f:deg dec:f:deg supernovae:i delta_ab:f delta_ab_error:f caution:t", [
        (ra, dec, n_used, 0.004 * math.cos(math.radians(ra - 30)) * math.cos(math.radians(dec)), 0.0021, "most extreme of 96" if k == 0 else "") for k, (ra, dec) in enumerate(poles)])
    for name, (columns, rows) in tables.items():
        if name not in without:
            write(folder, name + ".ecsv", spec(columns), rows)
    summary = {
        "a_b": {"value": AB + (0.01317 if blind else 0.0), "error": math.hypot(stat, sys_error), "error_stat": stat, "error_sys": sys_error, "blind": blind},
        "supernovae": n_used, "scatter_mag": scatter, "alpha": ALPHA, "beta": BETA, "gamma": GAMMA, "sigma_int": SIGMA_INT, "z_min": 0.0233, "z_max": 0.15,
        "cuts": [{"rule": r, "removed_alone": a, "removed_in_order": o, "left": l} for r, a, o, l in cuts],
        "warnings": ["7 supernovae have no host mass; they count as half above the step.", "Seven Dials: fewer than 20 supernovae, its zero point rests on %s epochs." % ("few" if "--plain" in sys.argv else "<i>few</i>")],
        "inputs": [{"file": "photometry/%s.ecsv" % s.lower().replace(" ", "-"), "sha256": "%064x" % rng.getrandbits(256)} for s in SURVEYS] + [{"file": "templates/stretch-colour.fits", "sha256": "%064x" % rng.getrandbits(256)}],
        "h0": {"value": 73.04, "error": 1.9}, "absolute_magnitude": {"value": -19.24, "error": 0.045}, "join": {"calibrators": 6},
        "version": "thirdrung 0.1.0", "files": sorted(name + ".ecsv" for name in tables if name not in without),
    }
    if "summary" not in without:
        with open(os.path.join(folder, "summary.json"), "w", encoding="utf-8") as out:
            json.dump(summary, out, ensure_ascii=False, indent=1)


if __name__ == "__main__":
    main()
