"""Power spectrum and velocity covariance, redone with scipy and astropy.

- Transfer function: Eisenstein & Hu 1998, ApJ 496, 605, coded here once more from the paper's equations; 1e-8.
- Sound horizon: the integral of the sound speed to their drag redshift instead of their closed form; 2e-3 (both with
  matter and radiation only; their equality redshift is rounded).
- Normalisation: the published pair A_s = 2.100e-9 and sigma8 = 0.8111 (Planck 2018 VI, table 2); 4%, since the fit is good to a few
  percent and their neutrinos have mass.
- Correlation functions: scipy quadrature with spherical_jn; 1e-4 of the value at zero.
- Covariance of pairs: the sum over multipoles of Hui & Greene 2006 (Phys. Rev. D 73, 123526), int dk P j_l'(k r1) j_l'(k r2) (2l+1)
  P_l(cos), which never uses the two correlation functions; 1e-3 of the variance. Distances and growth from astropy and quadrature.
"""
import json
import os
import subprocess
import sys
import tempfile

import numpy as np
from astropy.cosmology import FlatLambdaCDM
from scipy import integrate, special

program = os.path.join("tests", "test_hubbleflow")
if not os.path.exists(program):
    print("test_hubbleflow is not built")
    sys.exit(77)
with tempfile.TemporaryDirectory() as folder:
    path = os.path.join(folder, "values.json")
    subprocess.run([program, "write power spectrum and velocity covariances"], check=True,
                   env=dict(os.environ, THIRDRUNG_DUMP=path), stdout=subprocess.DEVNULL)
    with open(path) as file:
        tool = json.load(file)

om, obh2, h, ns, sigma8, theta = 0.3153, 0.02237, 0.6736, 0.9649, 0.8111, 2.7255 / 2.7
w = om * h * h
fb = obh2 / w
fc = 1 - fb
zeq = 2.5e4 * w * theta**-4
keq = 0.0746 * w * theta**-2
zd = 1291 * w**0.251 / (1 + 0.659 * w**0.828) * (
    1 + 0.313 * w**-0.419 * (1 + 0.607 * w**0.674) * obh2 ** (0.238 * w**0.223))
R = lambda z: 31.5 * obh2 * theta**-4 / (z / 1000)
s = 2 / (3 * keq) * np.sqrt(6 / R(zeq)) * np.log((np.sqrt(1 + R(zd)) + np.sqrt(R(zd) + R(zeq))) / (1 + np.sqrt(R(zeq))))
silk = 1.6 * obh2**0.52 * w**0.73 * (1 + (10.4 * w) ** -0.95)


def transfer(k_h):
    k = k_h * h
    q = k / 13.41 / keq
    t0 = lambda a, b: np.log(np.e + 1.8 * b * q) / (
        np.log(np.e + 1.8 * b * q) + (14.2 / a + 386 / (1 + 69.9 * q**1.08)) * q * q)
    ac = ((46.9 * w) ** 0.67 * (1 + (32.1 * w) ** -0.532)) ** -fb * ((12 * w) ** 0.424 * (1 + (45 * w) ** -0.582)) ** -(fb**3)
    bc = 1 / (1 + 0.944 / (1 + (458 * w) ** -0.708) * (fc ** ((0.395 * w) ** -0.0266) - 1))
    f = 1 / (1 + (k * s / 5.4) ** 4)
    tc = f * t0(1, bc) + (1 - f) * t0(ac, bc)
    y = (1 + zeq) / (1 + zd)
    g = y * (-6 * np.sqrt(1 + y) + (2 + 3 * y) * np.log((np.sqrt(1 + y) + 1) / (np.sqrt(1 + y) - 1)))
    ab = 2.07 * keq * s * (1 + R(zd)) ** -0.75 * g
    bb = 0.5 + fb + (3 - 2 * fb) * np.sqrt((17.2 * w) ** 2 + 1)
    st = s / (1 + (8.41 * w**0.435 / (k * s)) ** 3) ** (1 / 3)
    tb = (t0(1, 1) / (1 + (k * s / 5.2) ** 2) + ab / (1 + (bb / (k * s)) ** 3) * np.exp(-((k / silk) ** 1.4))) * np.sinc(k * st / np.pi)
    return fb * tb + fc * tc


def simpson(f, low, high, n):
    x = np.linspace(low, high, n)
    return integrate.simpson(f(x), x)


def sigma(power, r=8.0):
    def f(lnk):
        k = np.exp(lnk)
        x = k * r
        return k**3 * power(k) * (3 * special.spherical_jn(1, x) / x) ** 2 / (2 * np.pi**2)
    return np.sqrt(simpson(f, np.log(1e-6), np.log(60), 20001))


shape = lambda k: k**ns * transfer(k) ** 2
amplitude = (sigma8 / sigma(shape)) ** 2
power = lambda k: amplitude * shape(k)

for k, t, p in tool["power"]:
    assert abs(t / transfer(k) - 1) < 1e-8, (k, t, transfer(k))
    assert abs(p / power(k) - 1) < 1e-5, (k, p, power(k))

# Sound horizon by integration: c_s/H with H^2 = (100 km/s/Mpc)^2 w [(1+z)^3 + (1+z)^4/(1+zeq)].
f = lambda a: 2997.92458 / np.sqrt(3 * (1 + R(1 / a))) / (a * a * np.sqrt(w * (a**-3 + a**-4 / zeq)))
horizon = integrate.quad(f, 1e-9, 1 / (1 + zd))[0]
print("sound horizon", tool["sound_horizon"], "integrated", horizon)
assert abs(tool["sound_horizon"] / horizon - 1) < 2e-3

# sigma8 of the published primordial amplitude: P = 2 pi^2 A_s (k/k0)^(ns-1) k (2 D/(5 om))^2 (c/H0)^4 T^2 in Mpc/h, D -> a early.
e = lambda a: np.sqrt(om / a**3 + 1 - om)
growth = 2.5 * om * integrate.quad(lambda a: 1 / (a * e(a)) ** 3, 1e-8, 1)[0]
primordial = lambda k: 2 * np.pi**2 * 2.100e-9 * (k * h / 0.05) ** (ns - 1) * k * (2 * growth / (5 * om)) ** 2 * 2997.92458**4 * transfer(k) ** 2
print("sigma8 of A_s = 2.100e-9:", sigma(primordial), "published 0.8111")
assert abs(sigma(primordial) / 0.8111 - 1) < 0.04

smoothing = 4.0
rate = om**0.55
scale = (100 * rate) ** 2 / (2 * np.pi**2)
k = np.linspace(1e-6, 1.3, 130001)
pw = power(k) * np.exp(-((k * smoothing) ** 2)) * scale
zero = integrate.simpson(pw, k) / 3
print("one velocity component [km/s]", np.sqrt(zero))
for r, along, across in tool["correlation"]:
    x = np.maximum(k * r, 1e-8)
    ratio = special.spherical_jn(1, x) / x
    assert abs(integrate.simpson(pw * (special.spherical_jn(0, x) - 2 * ratio), k) - along) < 1e-4 * zero, r
    assert abs(integrate.simpson(pw * ratio, k) - across) < 1e-4 * zero, r

supernovae = np.array(tool["supernovae"])
covariance = np.array(tool["covariance"]).reshape(6, 6)
astropy_distance = FlatLambdaCDM(H0=100, Om0=om, Tcmb0=0)
distance = astropy_distance.comoving_distance(supernovae[:, 2]).value
omz = lambda z: om * (1 + z) ** 3 / (om * (1 + z) ** 3 + 1 - om)
rate_of = lambda z: omz(z) ** 0.55
g = np.array([np.exp(-integrate.quad(lambda x: rate_of(x) / (1 + x), 0, z)[0]) * rate_of(z) / rate * e(1 / (1 + z)) / (1 + z)
              for z in supernovae[:, 2]])
ra, dec = np.radians(supernovae[:, 0]), np.radians(supernovae[:, 1])
direction = np.stack([np.cos(dec) * np.cos(ra), np.cos(dec) * np.sin(ra), np.sin(dec)], axis=1)
k = np.linspace(1e-6, 0.9, 6001)
pw = power(k) * np.exp(-((k * smoothing) ** 2)) * scale
slopes = np.array([[special.spherical_jn(l, k * d, derivative=True) for d in distance] for l in range(450)])
worst = 0.0
for i in range(6):
    for j in range(i):
        legendre = special.eval_legendre(np.arange(450), direction[i] @ direction[j])
        kernel = np.einsum("l,lk->k", (2 * np.arange(450) + 1) * legendre, slopes[:, i] * slopes[:, j])
        expected = g[i] * g[j] * integrate.simpson(pw * kernel, k)
        worst = max(worst, abs(expected - covariance[i, j]) / zero)
print("largest difference of a pair from the multipole sum, of the variance:", worst)
assert worst < 1e-3
assert np.allclose(np.diag(covariance), g**2 * zero, rtol=1e-4)
