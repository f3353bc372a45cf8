"""Tables against astropy, both ways: what astropy writes is read here, and what is written here astropy reads, equal.

Source of the truth: astropy.table and astropy.io.fits (4.3 or later). Tolerance: none. Every double, text, mask,
unit and remark must come back the same, but for what a format cannot hold, which the test in question names.
"""
import os
import pathlib
import random
import string
import struct
import subprocess
import sys
import tempfile
import unittest
import warnings

try:
    import numpy as np
    from astropy import units
    from astropy.io import fits
    from astropy.table import MaskedColumn, QTable, Table
    from astropy.time import Time
except ImportError as missing:
    print(f"skipped: {missing}")
    sys.exit(77)

CONVERT = pathlib.Path(os.environ.get("THIRDRUNG_TOOLS", "tools")) / "convert_table"
ECSV = {"format": "ascii.ecsv"}


def convert(source, target, *more, expect=0):
    run = subprocess.run([CONVERT, source, target, *more], capture_output=True, text=True)
    assert run.returncode == expect, f"exit code {run.returncode}: {run.stderr}"
    return run.stderr


def mask_of(column):
    return np.asarray(column.mask) if hasattr(column, "mask") else np.zeros(len(column), bool)


def texts_of(column):
    return [value.decode() if isinstance(value, bytes) else str(value) for value in column.tolist()]


def awkward_doubles(rng, count):
    """Doubles of any size: random bits, and the values that trip writers of decimals."""
    values = [0.0, -0.0, 0.1, 1 / 3, 1e-5, 1e16, 1e22, 5e-324, 2.2250738585072014e-308, 1.7976931348623157e308,
              53249.29, 2.0**53 + 2, float("inf"), float("-inf")]
    while len(values) < count:
        value = struct.unpack("<d", struct.pack("<Q", rng.getrandbits(64)))[0]
        if value == value:
            values.append(value)
    return np.array(values[:count])


def awkward_text(rng):
    letters = string.ascii_letters + string.digits + ",;\"' #\\:{}[]&*!|>%@`~ éµÅλ星🌟"
    # Blanks at the ends are lost in astropy's own reader, even in quotes.
    return "".join(rng.choice(letters) for _ in range(rng.randint(1, 12))).strip() or "x"


def random_table(seed, rows=50, text=awkward_text):
    rng = random.Random(seed)
    nprng = np.random.default_rng(seed)
    table = Table(masked=True)
    table["name"] = [text(rng) for _ in range(rows)]
    table["mjd"] = awkward_doubles(rng, rows)
    table["mjd"].unit = "d"
    table["flux"] = nprng.normal(size=rows)
    table["flux"].unit = "uJy"
    table["number"] = nprng.integers(-(2**62), 2**62, size=rows)
    table["kept"] = nprng.random(rows) < 0.5
    for name in ("name", "flux", "number", "kept"):
        table[name] = MaskedColumn(table[name], mask=nprng.random(rows) < 0.2)
    table["flux"].description = "of the source: \"dark\" # or not"
    table.meta["source"] = "an invented survey, # 1: \"quotes\", 'more' and λ"
    table.meta["note"] = "yes"
    return table


class Against(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.TemporaryDirectory()
        self.addCleanup(self.folder.cleanup)
        self.at = pathlib.Path(self.folder.name)
        warnings.simplefilter("ignore")

    def assert_same(self, got, want, masks=True):
        self.assertEqual(got.colnames, want.colnames)
        for name in want.colnames:
            a, b = got[name], want[name]
            if masks:
                np.testing.assert_array_equal(mask_of(a), mask_of(b), err_msg=name)
            keep = ~(mask_of(a) | mask_of(b))
            if b.dtype.kind in "US":
                self.assertEqual(texts_of(a[keep]), texts_of(b[keep]), name)
            else:
                self.assertEqual(a.dtype.kind.replace("u", "i"), b.dtype.kind.replace("u", "i"), name)
                left, right = np.asarray(a[keep]), np.asarray(b[keep])
                np.testing.assert_array_equal(left, right, err_msg=name)
                if right.dtype.kind == "f":  # -0.0 is not 0.0
                    np.testing.assert_array_equal(np.signbit(left), np.signbit(right), err_msg=name)
            self.assertEqual(units.Unit(a.unit or ""), units.Unit(b.unit or ""), name)

    def ecsv_round_trip(self, table, **options):
        first, second = self.at / "first.ecsv", self.at / "second.ecsv"
        table.write(first, overwrite=True, **ECSV, **options)
        convert(first, second, *(["blanks"] if options.get("delimiter", " ") == " " else []))
        return Table.read(first, **ECSV), Table.read(second, **ECSV)


class Ecsv(Against):
    def test_random_tables(self):
        for seed in range(12):
            for delimiter in ", ":
                with self.subTest(seed=seed, delimiter=delimiter):
                    want, got = self.ecsv_round_trip(random_table(seed), delimiter=delimiter)
                    self.assert_same(got, want)
                    self.assertEqual(dict(got.meta), dict(want.meta))
                    self.assertEqual(got["flux"].description, want["flux"].description)

    def test_every_datatype(self):
        table = Table()
        for kind in ("int8", "int16", "int32", "int64", "uint8", "uint16", "uint32"):
            limits = np.iinfo(kind)
            table[kind] = np.array([limits.min, 0, limits.max], kind)
        table["uint64"] = np.array([0, 1, 2**63 - 1], "uint64")
        for kind in ("float16", "float32", "float64"):
            table[kind] = np.array([0.1, np.nan, -np.inf], kind)
        table["bool"] = [True, False, True]
        want, got = self.ecsv_round_trip(table, delimiter=",")
        self.assert_same(got, want)

    def test_text_with_line_breaks(self):
        table = Table({"name": ["two\nlines", "quote \" in\nthe middle", "plain"], "x": [1.0, 2.0, 3.0]})
        want, got = self.ecsv_round_trip(table, delimiter=",")
        self.assert_same(got, want)
        self.assertEqual(got["name"][0], "two\nlines")

    def test_one_column_with_missing_values(self):
        for column in (MaskedColumn([1.5, 2.5, 3.5], mask=[True, False, True]), MaskedColumn(["a", "b", "c"], mask=[0, 1, 0])):
            for delimiter in ", ":
                want, got = self.ecsv_round_trip(Table({"x": column}), delimiter=delimiter)
                self.assert_same(got, want)

    def test_no_rows(self):
        want, got = self.ecsv_round_trip(Table({"x": np.array([], float), "name": np.array([], "U4")}), delimiter=",")
        self.assert_same(got, want)

    def test_column_names(self):
        names = ["a b", "comma,", "λ", "#", "yes", "1st", "a:b", "quote\"", "m_b"]
        for delimiter in ", ":
            want, got = self.ecsv_round_trip(Table({name: [1.0, 2.0] for name in names}), delimiter=delimiter)
            self.assert_same(got, want)

    def test_remarks(self):
        table = Table({"x": [1.0]})
        table.meta.update({"text": "12", "number": 3, "real": 0.1, "list": [1, 2], "tree": {"a": "b"}, "lines": "",
                           "empty": "", "key with: colon": "λ \\ \t"})
        # astropy's writer breaks long texts over lines and its reader drops the empty ones: a line break in a remark is
        # compared with what was meant, not with what astropy makes of its own file.
        table.meta["lines"] = "one two: 'three'"
        want, got = self.ecsv_round_trip(table, delimiter=",")
        self.assertEqual(list(got.meta), list(want.meta))
        for key in ("text", "lines", "empty", "key with: colon"):
            self.assertEqual(got.meta[key], table.meta[key])
        # Remarks are texts here: numbers become their text, lists and maps their YAML.
        self.assertEqual([got.meta["number"], got.meta["real"]], ["3", "0.1"])
        self.assertEqual(got.meta["list"], "[1, 2]")

    def test_quantities(self):
        table = QTable({"flux": [1.0, 2.0] * units.uJy, "v": [3.0, 4.0] * units.km / units.s,
                        "density": [1.0, 2.0] * units.erg / units.s / units.cm**2 / units.AA})
        want, got = self.ecsv_round_trip(table, delimiter=",")
        self.assert_same(got, want)

    def test_masks_in_columns_of_their_own_are_refused(self):
        table = Table({"x": MaskedColumn([1.0, 2.0], mask=[True, False])})
        table.write(self.at / "masks.ecsv", serialize_method="data_mask", **ECSV)
        self.assertIn("mask", convert(self.at / "masks.ecsv", self.at / "out.ecsv", expect=3))


class Fits(Against):
    def through(self, table, first, second):
        table.write(self.at / first, overwrite=True)
        convert(self.at / first, self.at / second)
        return Table.read(self.at / first), Table.read(self.at / second)

    def plain_table(self, seed, rows=50):
        """astropy writes no letters beyond ASCII into FITS."""
        table = random_table(seed, rows, lambda rng: awkward_text(rng).encode("ascii", "ignore").decode().strip() or "x")
        table["kept"] = np.asarray(table["kept"])  # nor has it missing truth values there
        table.meta["source"] = "an invented survey"
        return table

    def test_random_tables(self):
        for seed in range(6):
            for endings in ((".fits", ".fits"), (".fits.gz", ".fits"), (".fits", ".fits.gz")):
                with self.subTest(seed=seed, endings=endings):
                    want, got = self.through(self.plain_table(seed), "first" + endings[0], "second" + endings[1])
                    self.assert_same(got, want)
                    self.assertEqual(got.meta["SOURCE"], want.meta["SOURCE"])

    def test_checksums_and_structure(self):
        self.plain_table(1).write(self.at / "first.ecsv", **ECSV)
        for name in ("second.fits", "second.fits.gz"):
            convert(self.at / "first.ecsv", self.at / name)
            with warnings.catch_warnings():
                warnings.simplefilter("error")  # a wrong or absent checksum is a warning of astropy's
                with fits.open(self.at / name, checksum=True) as file:
                    for hdu in file:
                        self.assertIn("CHECKSUM", hdu.header)
                        self.assertEqual(hdu.verify_checksum(), 1)
                        self.assertEqual(hdu.verify_datasum(), 1)
                    file.verify("exception")

    def test_ecsv_to_fits_and_back(self):
        table = random_table(3)
        # FITS cannot tell these apart from missing values or loses them: an empty text, an infinite keyword.
        table.write(self.at / "first.ecsv", delimiter=",", **ECSV)
        convert(self.at / "first.ecsv", self.at / "middle.fits.gz")
        convert(self.at / "middle.fits.gz", self.at / "last.ecsv")
        want, got = Table.read(self.at / "first.ecsv", **ECSV), Table.read(self.at / "last.ecsv", **ECSV)
        self.assert_same(got, want)
        self.assertEqual(dict(got.meta), dict(want.meta))
        self.assertEqual(got["flux"].description, want["flux"].description)

    def test_long_remarks(self):
        table = Table({"x": [1.0]})
        table.meta["source"] = "a very long source " * 20 + "end"
        table.meta["short_but_long_key"] = "text"
        table.write(self.at / "first.ecsv", **ECSV)
        convert(self.at / "first.ecsv", self.at / "second.fits")
        got = Table.read(self.at / "second.fits")
        self.assertEqual(got.meta["SOURCE"], table.meta["source"])
        self.assertEqual(got.meta["SHORT_BUT_LONG_KEY"], "text")

    def test_integers_with_offset_and_small_types(self):
        columns = [fits.Column("u", "J", bzero=2**31, array=np.array([0, 5, 2**32 - 1], "uint32")),
                   fits.Column("b", "B", array=np.array([0, 1, 255], "uint8")),
                   fits.Column("i", "I", array=np.array([-5, 0, 5], "int16"), null=0),
                   fits.Column("scaled", "I", array=np.array([0, 1, 2], "int16")),
                   fits.Column("e", "E", array=np.array([0.1, np.nan, 2.0], "float32")),
                   fits.Column("spectrum", "4E", array=np.zeros((3, 4), "float32"))]
        hdu = fits.BinTableHDU.from_columns(columns)
        hdu.header["TSCAL4"], hdu.header["TZERO4"] = 0.5, 1.0
        hdu.writeto(self.at / "first.fits")
        convert(self.at / "first.fits", self.at / "second.ecsv")
        got = Table.read(self.at / "second.ecsv", **ECSV)
        self.assertEqual(got.colnames, ["u", "b", "i", "scaled", "e"])
        self.assertEqual(got["u"].tolist(), [0, 5, 2**32 - 1])
        self.assertEqual(got["b"].tolist(), [0, 1, 255])
        self.assertEqual(got["i"].tolist(), [-5, None, 5])
        self.assertEqual(got["scaled"].tolist(), [1.0, 1.5, 2.0])
        self.assertEqual(got["e"].tolist(), [float(np.float32(0.1)), None, 2.0])

    def test_time_columns_stay_numbers(self):
        table = Table({"t": Time([53249.29, 53250.5], format="mjd").mjd})
        table["t"].unit = "d"
        want, got = self.through(table, "first.fits", "second.fits")
        self.assert_same(got, want)

    def test_damage_is_one_sentence(self):
        self.plain_table(5, rows=2000).write(self.at / "first.ecsv", **ECSV)
        convert(self.at / "first.ecsv", self.at / "good.fits")
        convert(self.at / "first.ecsv", self.at / "good.fits.gz")
        rng = random.Random(7)
        for name in ("good.fits", "good.fits.gz"):
            content = (self.at / name).read_bytes()
            bad = self.at / ("bad" + name[4:])
            cuts = [rng.randrange(1, len(content)) for _ in range(12)] + [1, 2, 80, 2880, len(content) - 1]
            for cut in cuts:
                bad.write_bytes(content[:cut])
                self.assert_one_sentence(convert(bad, self.at / "out.ecsv", expect=3), bad)
            for _ in range(30):
                at = rng.randrange(len(content))
                changed = bytearray(content)
                changed[at] ^= 1 << rng.randrange(8)
                bad.write_bytes(changed)
                run = subprocess.run([CONVERT, bad, self.at / "out.ecsv"], capture_output=True, text=True)
                self.assertIn(run.returncode, (0, 3), run.stderr)
                if run.returncode == 3:
                    self.assert_one_sentence(run.stderr, bad)
                else:  # only where gzip's own header has a byte of no effect
                    self.assertTrue(name.endswith(".gz"))
                    self.assert_same(Table.read(self.at / "out.ecsv", **ECSV), self.plain_table(5, rows=2000))

    def assert_one_sentence(self, message, path):
        self.assertEqual(message.count("\n"), 1, message)
        self.assertTrue(message.startswith(str(path)), message)
        self.assertTrue(message.endswith(".\n"), message)


class Csv(Against):
    def test_against_astropy(self):
        table = Table({"supernova": ["1999", "a,b", "quote\"", "x"], "mjd": [1.5, 2.5, 3.5, 4.5], "count": [1, 2, 3, 4],
                       "name": ["p", "q", "r", "s"]})
        table["flux"] = MaskedColumn([1.0, 2.0, 3.0, 4.0], mask=[0, 1, 0, 0])
        table.write(self.at / "first.csv", format="ascii.csv")
        convert(self.at / "first.csv", self.at / "second.csv")
        convert(self.at / "first.csv", self.at / "third.ecsv")
        self.assert_same(Table.read(self.at / "second.csv", format="ascii.csv", converters={"supernova": str}), table)
        third = Table.read(self.at / "third.ecsv", **ECSV)
        self.assertEqual([str(third[name].unit) for name in ("mjd", "flux")], ["d", "uJy"])
        self.assertEqual(third["supernova"].tolist(), table["supernova"].tolist())

    def test_units_against_astropy(self):
        """Plain CSV is written in the unit that a column's name stands for: a way to see a conversion from outside.

        Tolerance: 4 units in the last place, for astropy's own chain of factors.
        """
        kinds = {"flux": "nJy uJy mJy Jy kJy MJy erg/(s.cm2.Hz) W/(m2.Hz) 1e-3*Jy 10**-29*erg/(s.cm2.Hz)",
                 "wavelength": "Angstrom nm um micron m mm cm km pm pc AU",
                 "mjd": "d day s min h yr ms ks us",
                 "ra": "deg rad arcmin arcsec mas hourangle mrad uas",
                 "mag": "mag mmag",
                 "v_pec": "km/s m/s cm/s km/h AU/yr pc/yr Angstrom/s km.s-1 kpc/Gyr"}
        defaults = {"flux": "uJy", "wavelength": "Angstrom", "mjd": "d", "ra": "deg", "mag": "mag", "v_pec": "km/s"}
        for name, spellings in kinds.items():
            for spelling in spellings.split():
                unit = units.Unit(spelling)
                written = {spelling, unit.to_string()}
                for style in ("fits", "vounit"):
                    try:
                        written.add(unit.to_string(style))
                    except ValueError:
                        pass
                for text in sorted(written):
                    with self.subTest(name=name, unit=text):
                        (self.at / "u.ecsv").write_text(
                            f"# %ECSV 1.0\n# ---\n# datatype:\n# - {{name: {name}, unit: '{text}', datatype: float64}}\n{name}\n1.5\n")
                        convert(self.at / "u.ecsv", self.at / "u.csv")
                        got = float((self.at / "u.csv").read_text().split()[1])
                        want = (1.5 * unit).to_value(defaults[name])
                        self.assertLessEqual(abs(got / want - 1), 1e-15)


if __name__ == "__main__":
    unittest.main()
