#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>

#include "lightcurve/synthetic_template.h"
#include "template/band_table.h"
#include "template/template_file.h"

using namespace thirdrung;

namespace {

Passband smooth_band(const std::string& id, double blue, double red, double edge) {
  std::vector<double> wavelength;
  std::vector<double> throughput;
  for (double w = blue - edge; w <= red + edge; w += 25) {
    wavelength.push_back(w);
    throughput.push_back(std::clamp((std::min(w - blue, red - w) / edge + 1) / 2, 0.0, 1.0));
  }
  return Passband(id, wavelength, throughput, Response::photon);
}

double magnitudes(double ratio) {
  return 2.5 * std::abs(std::log10(ratio));
}

/// Largest difference [mag] between table and direct integral over a 2 angstrom grid, and where.
double worst_difference(const SpectralTemplate& model, const TemplateGrid& grid, const Passband& band, double z,
                        double ebv, double s_low, double s_high, double c_low, double c_high) {
  const Extinction dust;
  const BandTable table(grid, band_weights(band, z, dust, ebv, grid.wavelength_step()));
  const BandWeights fine = band_weights(band, z, dust, ebv, 2.0);
  double worst = 0;
  for (int i = 0; i <= 8; ++i) {
    for (int k = 0; k <= 6; ++k) {
      const double s = s_low + (s_high - s_low) * i / 8;
      const double c = c_low + (c_high - c_low) * k / 6;
      for (double p = -15; p <= 50; p += 1.3) {
        const double q = p / s;
        if (q < model.phase_min || q > model.phase_max) continue;
        worst = std::max(worst, magnitudes(table.at(q, s, c).flux / integrate_band(model, fine, q, s, c).flux));
      }
    }
  }
  return worst;
}

/// The synthetic template of the tests, and those that the program ships with.
std::vector<SpectralTemplate> templates_at_hand() {
  std::vector<SpectralTemplate> out = {testing::synthetic_template()};
  std::error_code none;
  for (const auto& entry : std::filesystem::directory_iterator(THIRDRUNG_SOURCE_DIR "/templates", none)) {
    if (entry.path().string().find(".fits") != std::string::npos) out.push_back(read_template(entry.path()).model);
  }
  return out;
}

void check_accuracy(const SpectralTemplate& model) {
  const TemplateGrid grid(model);
  struct Case {
    Passband band;
    double z;
  };
  const std::vector<Case> cases = {
      {smooth_band("u", 3100, 3900, 200), 0.01},  {smooth_band("b", 3900, 5000, 300), 0.0},
      {smooth_band("g", 4000, 5500, 200), 0.05},  {smooth_band("r", 5500, 7000, 150), 0.15},
      {smooth_band("i", 6900, 8200, 150), 0.08},  {smooth_band("narrow", 5600, 5900, 50), 0.03},
      {smooth_band("wide", 4900, 7400, 300), 0.2}};
  for (const auto& one : cases) {
    const auto [blue, red] = one.band.core_range(0.02);
    if (blue < model.wavelength_min * (1 + one.z) || red > model.wavelength_max * (1 + one.z)) continue;
    for (const double ebv : {0.0, 0.4}) {
      INFO(one.band.id() << " z = " << one.z << " E(B-V) = " << ebv);
      CHECK(worst_difference(model, grid, one.band, one.z, ebv, 0.6, 1.4, -0.3, 0.6) < 2e-4);
    }
  }
}

}  // namespace

// Source: the direct integral of the same template over a 2 angstrom grid. Tolerance: 0.2 mmag, an order below the best
// photometry's own systematics.
TEST_CASE("band table is within 0.2 mmag of the direct integral") {
  for (const SpectralTemplate& model : templates_at_hand()) {
    INFO("template " << model.name);
    check_accuracy(model);
  }
}

// Beyond the promised range the expansion must degrade gracefully: fits are bounded to these values.
TEST_CASE("band table stays within 5 mmag up to the bounds of a fit") {
  const SpectralTemplate model = testing::synthetic_template();
  const TemplateGrid grid(model);
  CHECK(worst_difference(model, grid, smooth_band("g", 4000, 5500, 200), 0.05, 0.0, 0.4, 1.7, -0.6, 1.2) < 5e-3);
}

// Source: central differences of the table's own flux. Tolerance: their truncation, 1e-6 of the flux per unit.
TEST_CASE("band table's derivatives are those of its flux") {
  const TemplateGrid grid(testing::synthetic_template());
  const BandTable table(grid, band_weights(smooth_band("g", 4000, 5500, 200), 0.05, Extinction(), 0.1));
  for (const double q : {-30.0, -17.3, -3.2, 0.0, 14.9, 33.0, 75.0}) {
    for (const double s : {0.7, 1.0, 1.25}) {
      for (const double c : {-0.2, 0.0, 0.5}) {
        const BandFlux here = table.at(q, s, c);
        constexpr double h = 1e-5;
        const auto slope = [&](const BandFlux& a, const BandFlux& b) {
          return (b.flux - a.flux) / (2 * h) / here.flux;
        };
        CHECK(here.d_q / here.flux == Approx(slope(table.at(q - h, s, c), table.at(q + h, s, c))).margin(1e-6));
        CHECK(here.d_s / here.flux == Approx(slope(table.at(q, s - h, c), table.at(q, s + h, c))).margin(1e-6));
        CHECK(here.d_c / here.flux == Approx(slope(table.at(q, s, c - h), table.at(q, s, c + h))).margin(1e-6));
      }
    }
  }
}

// Source: the direct integral's own flux, by central differences.
TEST_CASE("the direct integral's derivatives are those of its flux") {
  const SpectralTemplate model = testing::synthetic_template();
  const BandWeights band = band_weights(smooth_band("r", 5500, 7000, 150), 0.02, Extinction(), 0.1);
  constexpr double h = 1e-5;
  const BandFlux here = integrate_band(model, band, 7.3, 0.9, 0.2);
  const auto slope = [&](double dq, double ds, double dc) {
    return (integrate_band(model, band, 7.3 + dq, 0.9 + ds, 0.2 + dc).flux -
            integrate_band(model, band, 7.3 - dq, 0.9 - ds, 0.2 - dc).flux) /
           (2 * h);
  };
  CHECK(here.d_q == Approx(slope(h, 0, 0)).epsilon(1e-6));
  CHECK(here.d_s == Approx(slope(0, h, 0)).epsilon(1e-6));
  CHECK(here.d_c == Approx(slope(0, 0, h)).epsilon(1e-6));
}

// Source: the passband's own exact photon rate of a flat f_λ spectrum and of a straight line: both are within what
// cubic interpolation carries exactly. Tolerance: rounding.
TEST_CASE("band weights integrate a straight spectrum exactly") {
  const Passband band = smooth_band("v", 4900, 6000, 275);
  const double z = 0.07;
  const BandWeights weights = band_weights(band, z, Extinction(), 0.0);
  double flat = 0;
  double line = 0;
  for (std::size_t j = 0; j < weights.weight.size(); ++j) {
    flat += weights.weight[j];
    line += weights.weight[j] * weights.wavelength[j];
  }
  Spectrum level{{2000, 12000}, {1e-15, 1e-15}};
  Spectrum rising{{2000, 12000}, {1e-15 * 2000, 1e-15 * 12000}};
  const double scale = 3631e6 / (band.photon_rate_ab_zero() * (1 + z)) * 1e15;
  CHECK(flat == Approx(band.photon_rate(level) * scale).epsilon(1e-9));
  CHECK(line == Approx(band.photon_rate(rising) * scale / (1 + z)).epsilon(1e-9));
}
