"""Positions, redshifts, distances and map files, against astropy.

The maps and the velocity cube are written here with astropy.io.fits and read by the tool under test. Exit code 77 where
astropy is absent.
"""
import os
import subprocess
import sys
import tempfile

try:
    import astropy.units as u
    import numpy as np
    from astropy.coordinates import SkyCoord
    from astropy.cosmology import FlatLambdaCDM
    from astropy.io import fits
    from astropy.wcs import WCS
except ImportError:
    print("skipped: no astropy")
    sys.exit(77)

TOOL = os.path.join(os.environ["THIRDRUNG_TOOLS"], "sky_values")
C = 299792.458


def tool(words, rows):
    """Rows of numbers through the tool, as an array."""
    text = "\n".join(" ".join(repr(float(x)) for x in row) for row in rows) + "\n"
    run = subprocess.run([TOOL, *words], input=text, capture_output=True, text=True, check=True)
    return np.array([[float(x) for x in line.split()] for line in run.stdout.splitlines()])


def directions(count, seed):
    random = np.random.default_rng(seed)
    return random.uniform(0, 360, count), np.degrees(np.arcsin(random.uniform(-1, 1, count)))


def check(what, ours, theirs, tolerance):
    worst = np.max(np.abs(np.asarray(ours) - np.asarray(theirs)))
    print(f"{what}: largest difference {worst:.2e}, allowed {tolerance:.0e}")
    if not worst <= tolerance:
        sys.exit(f"{what} differs")


def test_positions_and_distances():
    ra, dec = directions(500, 1)
    z = np.geomspace(1e-3, 1.2, 500)
    ours = tool(["positions"], zip(ra, dec, z))
    sky = SkyCoord(ra * u.deg, dec * u.deg).galactic
    # astropy goes from ICRS to Galactic by way of FK5 J2000, with its own matrices: it differs from the Hipparcos rotation by up to
    # 25 milliarcsec (the offset of FK5 from the ICRS). Tolerance 1e-5 deg = 36 milliarcsec.
    check("Galactic position [deg]",
          SkyCoord(ours[:, 0] * u.deg, ours[:, 1] * u.deg, frame="galactic").separation(sky).deg, 0, 1e-5)
    # The same dipole through astropy's angles. Tolerance: the position difference above times 370 km/s is below 1e-9.
    apex = SkyCoord(l=264.021 * u.deg, b=48.253 * u.deg, frame="galactic")
    w = -369.82 * np.cos(sky.separation(apex).rad) / C
    check("z_cmb", ours[:, 2], (1 + z) / np.sqrt((1 + w) / (1 - w)) - 1, 1e-9)
    cosmology = FlatLambdaCDM(H0=100, Om0=0.3, Tcmb0=0)
    # Both are quadratures of one smooth integral: 1e-10 relative is their common accuracy.
    check("d_L, flat LCDM (relative)", ours[:, 4] / (cosmology.luminosity_distance(z).to_value(u.Mpc) * 100 / C), 1, 1e-10)
    check("d_C, flat LCDM (relative)", ours[:, 5] / cosmology.comoving_distance(z).to_value(u.Mpc), 1, 1e-10)
    # The series leaves out the fourth power of z, so its relative error must shrink as z^3; its coefficient is of order 0.1 here.
    low = (z > 0.02) & (z < 0.15)
    ratio = ours[low, 3] / ours[low, 4]
    check("d_L, series against LCDM, over z^3", (ratio - 1) / z[low] ** 3, 0, 0.2)


def lambert_header(pole, size, style):
    """Header of a Lambert polar image with the keywords of the published sky maps, in its older or newer style."""
    header = fits.Header()
    header["BUNIT"] = "mag"
    header["CRPIX1"] = header["CRPIX2"] = size / 2 + 0.5
    if style != "wcs":
        header["LAM_NSGP"], header["LAM_SCAL"] = pole, size // 2
    if style == "lambert":
        header["CTYPE1"], header["CTYPE2"] = "LAMBERT--X", "LAMBERT--Y"
        header["CRVAL1"] = header["CRVAL2"] = 0.0
    else:
        header["CTYPE1"], header["CTYPE2"] = "GLON-ZEA", "GLAT-ZEA"
        header["CRVAL1"], header["CRVAL2"], header["LONPOLE"] = 90.0, 90.0 * pole, 180.0
        step = np.degrees(np.sqrt(2.0)) / (size // 2)
        header["CD1_1"], header["CD1_2"], header["CD2_1"], header["CD2_2"] = -step, 0.0, 0.0, step
    return header


def smooth(l, b):
    """A field on the sphere that varies slowly: E(B-V) in mag."""
    l, b = np.radians(l), np.radians(b)
    return 0.3 + 0.1 * np.cos(b) * np.cos(l - 0.4) + 0.05 * np.sin(b) + 0.04 * np.cos(b) ** 2 * np.sin(2 * l)


def test_lambert_pair(folder):
    # The positions of the pixels come from astropy's own zenithal equal-area projection, so that orientation, scale and hemisphere
    # are all checked. Pixels are 0.16 deg: bilinear interpolation of a field with curvature below 0.3 mag/rad^2 is good to 1e-6.
    size = 1024
    y, x = np.mgrid[0:size, 0:size]
    for style in ("zea", "wcs", "lambert"):
        names = []
        for pole in (1, -1):
            wcs = WCS(lambert_header(pole, size, "zea"))
            l, b = wcs.all_pix2world(x, y, 0)
            values = np.where(np.isfinite(l), smooth(l, b), np.nan).astype("f4")
            names.append(os.path.join(folder, f"{style}{pole}.fits"))
            fits.writeto(names[-1], values, lambert_header(pole, size, style))
        ra, dec = directions(2000, 2)
        sky = SkyCoord(ra * u.deg, dec * u.deg).galactic
        ours = tool(["lambert", *names], zip(ra, dec))[:, 0]
        check(f"E(B-V) of a Lambert pair ({style})", ours, smooth(sky.l.deg, sky.b.deg), 2e-6)


def ring_centres(nside):
    """Longitude and latitude of ring-ordered HEALPix pixel centres (Gorski et al. 2005, ApJ 622, 759, eqs. 4-9).

    A ring begins with its pixel at the smallest longitude: where its pixels stand at whole steps, at longitude zero.
    """
    l, z = [], []
    for ring in range(1, 4 * nside):
        mirrored = ring > 2 * nside
        i = 4 * nside - ring if mirrored else ring
        if i < nside:
            count, height = 4 * i, 1 - i * i / (3 * nside**2)
            phi = np.pi / (2 * i) * (np.arange(1, count + 1) - 0.5)
        else:
            count, height = 4 * nside, 4 / 3 - 2 * i / (3 * nside)
            phi = np.pi / (2 * nside) * (np.arange(1, count + 1) - (1 if (i - nside) % 2 else 0.5))
        l.append(np.degrees(phi))
        z.append(np.full(count, -height if mirrored else height))
    return np.concatenate(l), np.degrees(np.arcsin(np.concatenate(z)))


def nested_centres(nside):
    """The same for nested order: face, then x and y from the even and odd bits (eqs. 10-18, gathered into one expression)."""
    pixel = np.arange(12 * nside**2)
    face, inside = np.divmod(pixel, nside**2)
    x = y = np.zeros_like(pixel)
    for bit in range(nside.bit_length() - 1):
        x = x | ((inside >> (2 * bit)) & 1) << bit
        y = y | ((inside >> (2 * bit + 1)) & 1) << bit
    row = face // 4
    ring = (row + 2) * nside - x - y - 1
    i = np.minimum(np.minimum(ring, 4 * nside - ring), nside)
    phi = np.pi / 4 * (2 * (face % 4) - row % 2 + 1 + (x - y) / i)
    cap = 1 - i**2 / (3 * nside**2)
    z = np.where(ring < nside, cap, np.where(ring > 3 * nside, -cap, 4 / 3 - 2 * ring / (3 * nside)))
    return np.degrees(phi), np.degrees(np.arcsin(z))


def test_healpix(folder):
    # Centres by the published equations; 0.9 deg pixels, linear interpolation between four: 3e-4 mag for this field.
    nside = 64
    for frame, code, order, centres in (("galactic", "G", "RING", ring_centres), ("icrs", "C", "RING", ring_centres),
                                        ("galactic", "GALACTIC", "NESTED", nested_centres)):
        l, b = centres(nside)
        column = fits.Column(name="ebv", format="1024E", unit="mag", array=smooth(l, b).reshape(-1, 1024).astype("f4"))
        table = fits.BinTableHDU.from_columns([column])
        table.header["PIXTYPE"], table.header["ORDERING"] = "HEALPIX", order
        table.header["NSIDE"], table.header["COORDSYS"] = nside, code
        name = os.path.join(folder, f"healpix-{frame}-{order}.fits.gz")
        table.writeto(name)
        ra, dec = directions(2000, 3)
        sky = SkyCoord(ra * u.deg, dec * u.deg)
        x, y = (ra, dec) if frame == "icrs" else (sky.galactic.l.deg, sky.galactic.b.deg)
        check(f"E(B-V) of a HEALPix map ({frame}, {order})", tool(["healpix", name], zip(ra, dec))[:, 0], smooth(x, y), 3e-4)


def test_velocity_cube(folder):
    # A field linear in position, which trilinear interpolation holds exactly: v = A r. Along a direction n it is (n.A n) d, so the
    # equation for z_flow can be solved by an independent root finder.
    from scipy.optimize import brentq
    matrix = np.array([[1.5, 0.3, -0.4], [0.3, -2.0, 0.2], [-0.4, 0.2, 0.7]])
    bulk = np.array([60.0, -140.0, 20.0])
    axis = np.linspace(-400.0, 400.0, 41)
    z, y, x = np.meshgrid(axis, axis, axis, indexing="ij")
    cube = np.einsum("ij,jzyx->izyx", matrix, np.array([x, y, z])).astype("f4")
    header = fits.Header()
    header["BUNIT"], header["VFRAME"], header["VAXES"], header["VSPACE"] = "km/s", "CMB", "GALACTIC", "REAL"
    for n in "123":
        header["CUNIT" + n], header["CRPIX" + n], header["CRVAL" + n], header["CDELT" + n] = "Mpc/h", 21.0, 0.0, 20.0
    header["VEXT_X"], header["VEXT_Y"], header["VEXT_Z"] = bulk
    name = os.path.join(folder, "cube.fits")
    fits.writeto(name, cube, header)
    ra, dec = directions(200, 4)
    z_cmb = np.linspace(0.01, 0.12, 200)
    ours = tool(["grid", name], zip(ra, dec, z_cmb))
    cosmology = FlatLambdaCDM(H0=100, Om0=0.3, Tcmb0=0)
    n = SkyCoord(ra * u.deg, dec * u.deg).galactic.cartesian.xyz.value
    slope = np.einsum("ik,ij,jk->k", n, matrix, n)
    expected = []
    for k in range(len(ra)):
        def excess(z_flow, k=k):
            v = slope[k] * cosmology.comoving_distance(z_flow).to_value(u.Mpc) + bulk @ n[:, k]
            return (1 + z_flow) * (1 + v / C) - (1 + z_cmb[k])
        expected.append(brentq(excess, 1e-5, 0.2, xtol=1e-14))
    assert np.all(ours[:, 2] == 1), "every point lies inside the cube"
    # Single precision of the cube: 1e-7 of 800 km/s is 1e-4 km/s, 3e-10 in z.
    check("z_flow from a velocity cube", ours[:, 0], expected, 2e-9)
    outside = tool(["grid", name], [(10.0, 20.0, 0.5)])[0]
    assert outside[1] == 0 and outside[2] == 0, "outside the cube nothing is corrected"


if __name__ == "__main__":
    test_positions_and_distances()
    with tempfile.TemporaryDirectory() as scratch:
        test_lambert_pair(scratch)
        test_healpix(scratch)
        test_velocity_cube(scratch)
