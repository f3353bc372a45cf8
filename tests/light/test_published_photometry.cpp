// Real filter curves and the real spectrum of Vega against published magnitudes and band extinctions.
#include <algorithm>
#include <cmath>
#include <map>
#include <string>
#include <vector>

#include "base/constants.h"
#include "light/dust_law.h"
#include "light/passband_catalogue.h"
#include "real_data.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

struct RealCatalogue {
  Spectrum vega;
  PassbandCatalogue bands;
  explicit RealCatalogue(const std::filesystem::path& data)
      : vega(read_spectrum(read_table(data / "standards" / "vega.ecsv"))),
        bands(PassbandCatalogue::read(data / "passbands" / "catalogue.toml", vega)) {}
  double vega_ab(const std::string& id) const { return ab_magnitude(vega, bands.at(id).passband); }
};

/// Planck's law [erg s^-1 cm^-2 angstrom^-1, up to a factor], every 2 A, dimmed by `dust` for E(B-V) times `scale`.
Spectrum star_of_7000_kelvin(const Extinction& dust, double ebv_times_scale) {
  constexpr double hc_over_k_t = 1.438776877e8 / 7000;  // Second radiation constant [angstrom K] over T.
  Spectrum star;
  for (double x = 2500; x <= 12000; x += 2) {
    star.wavelength.push_back(x);
    star.flux.push_back(std::pow(10.0, -0.4 * dust.magnitudes(x, ebv_times_scale)) /
                        (std::pow(x / 5000, 5) * std::expm1(hc_over_k_t / x)));
  }
  return star;
}

}  // namespace

TEST_CASE("every entry of the real catalogue loads", "[light][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const RealCatalogue real(data);
  CHECK(real.bands.ids().size() >= 80);
  for (const std::string& id : real.bands.ids()) {
    CAPTURE(id);
    const CalibratedPassband& band = real.bands.at(id);
    CHECK(band.passband.mean_wavelength() > 3000);
    CHECK(band.passband.mean_wavelength() < 10000);
    CHECK(std::abs(band.ab_magnitude_of_zero) < 1);
    // The catalogue's statement of the "vega" system: Vega, tabulated on Landolt's scale, is 0.03 in every passband.
    if (band.system == MagnitudeSystem::standard) {
      CHECK(band.magnitude_of_flux(3631e6 * std::pow(10, -0.4 * real.vega_ab(id))) == Approx(0.03).margin(1e-9));
    }
  }
}

// Source: Schlafly & Finkbeiner 2011, ApJ 737, 103, Table 6, column R_V = 3.1: A_b/E(B-V)_SFD of Fitzpatrick's law,
// which is (definition from memory) the extinction of a 7000 K source in the photon-weighted band, with the law scaled
// to A(1 micron) = 0.78 x 1.32 E(B-V)_SFD: 1.32 is what Schlegel et al. 1998 took for A(1 micron)/E(B-V), 0.78 the
// recalibration. With this law that is 0.88, not 0.86, of its own E(B-V). SDSS, PS1 and DES figures were checked
// against public copies; Landolt's are from memory. Tolerance 2%: which curves they had for a name differs from ours;
// where they are the same (PS1, Tonry et al. 2012) 0.2%. Their "Landolt" curves are not Bessell's of 1990 that stand
// here: Schlegel et al. 1998 give them 3372 A as effective wavelength in U, where Bessell's U has 3600 A, hence 3%
// there.
TEST_CASE("band extinctions of Schlafly & Finkbeiner 2011", "[light][published][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const RealCatalogue real(data);
  const std::map<std::string, double> table = {
      {"landolt-B", 3.626}, {"landolt-V", 2.742}, {"landolt-R", 2.169}, {"landolt-I", 1.505}, {"sdss-u", 4.239},
      {"sdss-g", 3.303},    {"sdss-r", 2.285},    {"sdss-i", 1.698},    {"sdss-z", 1.263},    {"ps1-g", 3.172},
      {"ps1-r", 2.271},     {"ps1-i", 1.682},     {"ps1-z", 1.322},     {"des-g", 3.237},     {"des-r", 2.176},
      {"des-i", 1.595},     {"des-z", 1.217},     {"landolt-U", 4.334}};
  const Extinction dust(DustLaw::fitzpatrick99, 3.1);
  const double scale = 0.78 * 1.32 / dust.magnitudes(10000, 1);
  const double ebv = 0.01;  // Small: the table is the limit of little dust.
  const Spectrum bare = star_of_7000_kelvin(dust, 0);
  const Spectrum dimmed = star_of_7000_kelvin(dust, ebv * scale);
  for (const auto& [id, published] : table) {
    const Passband& band = real.bands.at(id).passband;
    const double extinction = (ab_magnitude(dimmed, band) - ab_magnitude(bare, band)) / ebv;
    CAPTURE(id, published, extinction);
    const double tolerance = id == "landolt-U" ? 0.03 : id.starts_with("ps1") ? 0.002 : 0.02;
    CHECK(extinction == Approx(published).epsilon(tolerance));
  }
}

// Source: Bessell, Castelli & Plez 1998, A&A 333, 231, Table A2: f_ν of a star of magnitude 0 in Bessell's 1990
// passbands, 4063, 3636, 3064, 2416 Jy in B, V, R, I and 1790 Jy in U (checked against a public copy). Tolerance 0.02:
// two calibrations of Vega and whether it is 0.00 or 0.03. U holds the Balmer jump, where their model atmosphere and
// the measured spectrum differ and where the atmosphere cuts the passband: 0.05.
TEST_CASE("AB magnitude of Vega in the Bessell bands", "[light][published][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const RealCatalogue real(data);
  const std::map<std::string, double> jansky = {
      {"landolt-U", 1790}, {"landolt-B", 4063}, {"landolt-V", 3636}, {"landolt-R", 3064}, {"landolt-I", 2416}};
  for (const auto& [id, zero] : jansky) {
    const double published = -2.5 * std::log10(zero / constants::ab_zero_jansky);
    CAPTURE(id, published, real.vega_ab(id));
    CHECK(real.vega_ab(id) == Approx(published).margin(id == "landolt-U" ? 0.05 : 0.02));
  }
}

// Source: Willmer 2018, ApJS 236, 47, Table 4 (mean f_λ of Vega [erg s^-1 cm^-2 A^-1] at the pivot wavelength; checked
// against a public copy), whose UBVRI of the second kind are the photonic passbands of Bessell & Murphy 2012, PASP 124,
// 140. His Vega is tied to Sirius and brighter than the measured spectrum that stands here by the same 0.024 mag in
// every band from g to z, within the 2% that he states for it. That one number is taken out as the median, and held
// below 0.03. Tolerance 0.02 for what is left (0.004 where the passbands are the same); not so in u and U, which hold
// the Balmer jump: his composite has a model there, and the U passbands are three different ones. They are held to
// 0.08.
TEST_CASE("AB magnitudes of Vega of Willmer 2018", "[light][published][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const RealCatalogue real(data);
  struct Row {
    std::string id;
    double pivot, flux;
  };
  const std::vector<Row> table = {
      {"landolt-U", 3611, 4.29723e-9}, {"landolt-B", 4396, 6.33795e-9}, {"landolt-V", 5511, 3.62701e-9},
      {"landolt-R", 6582, 2.13191e-9}, {"landolt-I", 8034, 1.15139e-9},  // Johnson and Cousins.
      {"landolt-U", 3597, 4.14586e-9}, {"landolt-B", 4378, 6.42715e-9}, {"landolt-V", 5489, 3.66982e-9},
      {"landolt-R", 6524, 2.19072e-9}, {"landolt-I", 7984, 1.17294e-9},  // Bessell & Murphy.
      {"sdss-u", 3556, 3.756e-9},      {"sdss-g", 4702, 5.52461e-9},    {"sdss-r", 6176, 2.55856e-9},
      {"sdss-i", 7490, 1.42903e-9},    {"sdss-z", 8947, 8.62665e-10},   {"des-g", 4820, 5.20407e-9},
      {"des-r", 6423, 2.27988e-9},     {"des-i", 7807, 1.25624e-9},     {"des-z", 9158, 8.23857e-10},
      {"ps1-g", 4849, 5.13274e-9},     {"ps1-r", 6201, 2.53499e-9},     {"ps1-i", 7535, 1.40245e-9},
      {"ps1-z", 8674, 9.26899e-10}};
  std::vector<double> differences;
  for (const Row& row : table) {
    const double jansky =
        row.flux * row.pivot * row.pivot / constants::speed_of_light_angstrom_s / constants::jansky_cgs;
    differences.push_back(real.vega_ab(row.id) + 2.5 * std::log10(jansky / constants::ab_zero_jansky));
  }
  std::vector<double> sorted = differences;
  std::sort(sorted.begin(), sorted.end());
  const double offset = sorted[sorted.size() / 2];
  CHECK(offset == Approx(0.024).margin(0.006));
  for (std::size_t i = 0; i < table.size(); ++i) {
    CAPTURE(table[i].id, differences[i], offset);
    const bool balmer = table[i].id == "landolt-U" || table[i].id == "sdss-u";
    const bool same_curve = table[i].id.starts_with("ps1") || table[i].id.starts_with("des");
    CHECK(differences[i] == Approx(offset).margin(balmer ? 0.08 : same_curve ? 0.004 : 0.02));
  }
}

// Source: Vega has B = V = 0.030 on Landolt's scale (Fukugita et al. 1996), and the natural magnitudes of the CSP
// follow from standard ones by the colour terms of Contreras et al. 2010 and Krisciunas et al. 2017, AJ 154, 211: B_nat
// = B - 0.061 (B-V), V_nat = V + 0.058 (V-i'); i' is the synthetic one here. That is what fixes the CSP zero points of
// B and V. Both from memory. Tolerance 0.002: the zero points are printed to 0.001 mag.
TEST_CASE("CSP synthetic zero points give Vega its magnitudes in B and V", "[light][published][realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const RealCatalogue real(data);
  const auto magnitude = [&](const std::string& id) {
    return real.bands.at(id).magnitude_of_flux(3631e6 * std::pow(10, -0.4 * real.vega_ab(id)));
  };
  CHECK(magnitude("csp-B") == Approx(0.030).margin(0.002));
  const double v_natural = 0.030 + 0.058 * (0.030 - magnitude("csp-i"));
  for (const std::string id : {"csp-V-3014", "csp-V-3009", "csp-V-9844"}) {
    CAPTURE(id);
    CHECK(magnitude(id) == Approx(v_natural).margin(0.002));
  }

  // Source: the SDSS's estimate for Vega in ugriz from its BVRI colours (SDSS data release 16, "ugriz colours of Vega
  // and the Sun"): g = -0.08 +- 0.03, u-g = 1.02 +- 0.08, g-r = -0.25 +- 0.03, r-i = -0.23 +- 0.02. Tolerance: those
  // errors, and the small colour terms between that system and the CSP's own (0.046 in u). The CSP ties ugri to BD+17
  // 4708, not to Vega.
  CHECK(magnitude("csp-g") == Approx(-0.08).margin(0.03));
  CHECK(magnitude("csp-g") - magnitude("csp-r") == Approx(-0.25).margin(0.03));
  CHECK(magnitude("csp-r") - magnitude("csp-i") == Approx(-0.23).margin(0.02));
  CHECK(magnitude("csp-u") - magnitude("csp-g") == Approx(1.02).margin(0.08));
}
