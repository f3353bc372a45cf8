"""The light-curve fit once more, in numpy and scipy and by other means than the program's own.

Band fluxes are direct integrals over the passband's own points and a 5 angstrom grid; splines are scipy's; the
covariance is a full matrix, whitened by its Cholesky factor; the minimum is scipy.optimize.least_squares'.
"""
import math
import tomllib

import numpy as np
from astropy.io import fits
from astropy.table import Table
from scipy.interpolate import BSpline, CubicSpline, RectBivariateSpline
from scipy.optimize import least_squares

LN_FLUX_PER_MAG = 0.4 * math.log(10)
SPEED_OF_LIGHT = 2.99792458e18  # angstrom / s
PLANCK_C = 6.62607015e-27 * SPEED_OF_LIGHT


def spline(breakpoints, coefficients):
    b = np.asarray(breakpoints, float)
    return BSpline(np.r_[[b[0]] * 3, b, [b[-1]] * 3], np.asarray(coefficients, float), 3)


class Template:
    """phi(q, wavelength) on tensor splines; arguments outside are held at the ends."""

    def __init__(self, arrays):
        self.a = arrays
        self.colour_spline = spline(arrays["colour_breakpoints"], arrays["colour_law"])

    @classmethod
    def read(cls, path):
        """From a template file (docs/template-file.md)."""
        names = {"phase_breakpoints": "PHI_PHASE", "wavelength_breakpoints": "PHI_WAVELENGTH", "log_flux": "PHI",
                 "stretch_phase_breakpoints": "GAMMA_PHASE", "stretch_wavelength_breakpoints": "GAMMA_WAVELENGTH",
                 "stretch_response": "GAMMA", "colour_breakpoints": "COLOUR_WAVELENGTH", "colour_law": "COLOUR",
                 "scatter_phase": "EPOCH_SCATTER_PHASE", "scatter_wavelength": "EPOCH_SCATTER_WAVELENGTH",
                 "log_epoch_scatter": "EPOCH_SCATTER", "colour_scatter_wavelength": "COLOUR_SCATTER_WAVELENGTH",
                 "log_colour_scatter": "COLOUR_SCATTER"}
        with fits.open(path, checksum=True) as file:
            return cls({name: np.asarray(file[part].data, float) for name, part in names.items()})

    @staticmethod
    def _held(x, breakpoints):
        return np.clip(x, breakpoints[0], breakpoints[-1])

    def _surface(self, name, coefficients, q, wavelength):
        phases = self.a[name + "phase_breakpoints"]
        wavelengths = self.a[name + "wavelength_breakpoints"]
        in_phase = spline(phases, coefficients)(self._held(np.atleast_1d(q), phases))
        return spline(wavelengths, in_phase.T)(self._held(wavelength, wavelengths)).T

    def flux(self, q, s, c, wavelength):
        """phi for every q (rows) and wavelength (columns)."""
        phi = self._surface("", self.a["log_flux"], q, wavelength)
        gamma = self._surface("stretch_", self.a["stretch_response"], q, wavelength)
        k = self.colour_spline(self._held(wavelength, self.a["colour_breakpoints"]))
        return np.exp(phi + (s - 1) * gamma - LN_FLUX_PER_MAG * c * k)

    def epoch_scatter(self, phase, wavelength):
        p, w = self.a["scatter_phase"], self.a["scatter_wavelength"]
        grid = RectBivariateSpline(p, w, self.a["log_epoch_scatter"], kx=1, ky=1)
        return np.exp(grid(np.clip(phase, p[0], p[-1]), np.full_like(phase, np.clip(wavelength, w[0], w[-1])), grid=False))

    def colour_scatter(self, wavelength):
        return math.exp(np.interp(wavelength, self.a["colour_scatter_wavelength"], self.a["log_colour_scatter"]))


def fitzpatrick99(wavelength, r_v=3.1):
    """A(wavelength)/E(B-V) redward of 2700 angstrom: spline of Fitzpatrick 1999, PASP 111, 63, Tables 3 and 4."""
    x = 1e4 / np.asarray(wavelength, float)
    c2 = -0.824 + 4.717 / r_v
    c1 = 2.030 - 3.007 * c2

    def ultraviolet(y):
        bump = y * y / ((y * y - 4.596**2) ** 2 + (0.99 * y) ** 2)
        return c1 + c2 * y + 3.23 * bump + r_v

    knots = np.array([0, 1e4 / 26500, 1e4 / 12200, 1e4 / 6000, 1e4 / 5470, 1e4 / 4670, 1e4 / 4110, 1e4 / 2700, 1e4 / 2600])
    values = [0, 0.265 * r_v / 3.1, 0.829 * r_v / 3.1,
              -0.426 + 1.0044 * r_v, -0.050 + 1.0016 * r_v, 0.701 + 1.0016 * r_v,
              1.208 + 1.0032 * r_v - 0.00033 * r_v**2, ultraviolet(1e4 / 2700), ultraviolet(1e4 / 2600)]
    return CubicSpline(knots, values, bc_type="natural")(x)


class Band:
    """One passband of one supernova: flux on the AB scale [uJy] by the trapezium rule."""

    def __init__(self, wavelength, throughput, response, z, ebv):
        fine = np.unique(np.r_[wavelength, np.arange(wavelength[0], wavelength[-1], 5.0)])
        t = np.interp(fine, wavelength, throughput)
        if response == "energy":
            t = np.where(t > 0, t / fine, 0)
        self.rest = fine / (1 + z)
        dimmed = t * fine * 10 ** (-0.4 * ebv * fitzpatrick99(fine))
        zero = 3631e-23 * np.trapz(t / fine, fine) * SPEED_OF_LIGHT  # of f_nu = 3631 Jy, times h c
        steps = np.zeros_like(fine)
        steps[:-1] += np.diff(fine) / 2
        steps[1:] += np.diff(fine) / 2
        self.weights = dimmed * steps / zero * 3631e6 / (1 + z)
        self.mean_wavelength = np.trapz(t * fine**2, fine) / np.trapz(t * fine, fine) / (1 + z)

    def flux(self, template, q, s, c):
        return template.flux(q, s, c, self.rest) @ self.weights


class Fit:
    """Epochs of one supernova: mjd, flux, error and the index of the band, with the bands."""

    def __init__(self, template, bands, z, mjd, flux, error, band):
        self.template, self.bands, self.z = template, bands, z
        self.mjd, self.data, self.error, self.band = mjd, flux, error, band

    def model(self, at):
        t_0, m_b, s, c = at
        out = np.empty_like(self.data)
        for b, one in enumerate(self.bands):
            here = self.band == b
            q = (self.mjd[here] - t_0) / (1 + self.z) / s
            out[here] = 10 ** (-0.4 * m_b) * one.flux(self.template, q, s, c)
        return out

    def covariance(self, at):
        f = self.model(at)
        phase = (self.mjd - at[0]) / (1 + self.z)
        out = np.diag(self.error**2)
        for b, one in enumerate(self.bands):
            here = np.flatnonzero(self.band == b)
            epsilon = self.template.epoch_scatter(phase[here], one.mean_wavelength)
            out[here, here] += (epsilon * f[here]) ** 2
            kappa = self.template.colour_scatter(one.mean_wavelength)
            out[np.ix_(here, here)] += kappa**2 * np.outer(f[here], f[here])
        return out

    def solve(self, start):
        """Best (t_0, m_B, s, c), covariance and chi2; C rebuilt until nothing moves by 1e-4 of its error."""
        at = np.array(start, float)
        for _ in range(40):
            factor = np.linalg.cholesky(self.covariance(at))
            scale = np.array([1.0, 0.1, 0.1, 0.1])
            found = least_squares(lambda y: np.linalg.solve(factor, self.data - self.model(at + y * scale)),
                                  np.zeros(4), method="lm", xtol=1e-10, ftol=1e-12)
            jacobian = found.jac / scale
            covariance = np.linalg.inv(jacobian.T @ jacobian)
            moved = np.abs(found.x * scale) / np.sqrt(np.diag(covariance))
            at = at + found.x * scale
            if moved.max() < 1e-4:
                break
        residual = np.linalg.solve(np.linalg.cholesky(self.covariance(at)), self.data - self.model(at))
        return at, covariance, float(residual @ residual)


def read_passbands(data, ids):
    """Wavelength, throughput and response of the catalogue's entries."""
    catalogue = tomllib.loads((data / "passbands" / "catalogue.toml").read_text())
    out = {}
    for entry in catalogue["passband"]:
        if entry["id"] in ids:
            table = Table.read(data / "passbands" / entry["file"], format="ascii.ecsv")
            wavelength = table["wavelength"].to("Angstrom").value.astype(float)
            out[entry["id"]] = (wavelength, np.asarray(table["throughput"], float), entry["response"])
    return out


def fit_of(template, data, fits_row, points, ebv):
    """The Fit of one row of lightcurve-fits.ecsv with the epochs listed for it in lightcurve-points.ecsv."""
    ids = fits_row["bands_used"].split(",")
    curves = read_passbands(data, ids)
    bands = [Band(*curves[one], fits_row["z_helio"], ebv) for one in ids]
    here = points[points["supernova"] == fits_row["supernova"]]
    return Fit(template, bands, fits_row["z_helio"], np.asarray(here["mjd"], float), np.asarray(here["flux"], float),
               np.asarray(here["flux_error"], float), np.array([ids.index(one) for one in here["passband"]]))
