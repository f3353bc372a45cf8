#include <catch2/catch.hpp>
#include <cmath>
#include <set>

#include "base/error.h"
#include "base/text.h"
#include "lightcurve/noise.h"
#include "sample/read_supernovae.h"
#include "simulation/observe.h"
#include "simulation/simulate.h"
#include "simulation/small_survey.h"
#include "simulation/write_simulation.h"
#include "tables/read_write.h"
#include "tables/scratch_folder.h"
#include "template/gauged_template.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

const SpectralTemplate& model() {
  static const SpectralTemplate one = gauged_template();
  return one;
}

}  // namespace

TEST_CASE("the same seed gives the same survey on any number of threads, another seed another") {
  SimulationOptions options = small_survey(12, 3);
  const ScratchFolder folder;
  options.threads = 1;
  write_simulation(simulate(options, model()), options, folder / "one");
  options.threads = 4;
  write_simulation(simulate(options, model()), options, folder / "four");
  options.seed = 4;
  write_simulation(simulate(options, model()), options, folder / "other");
  const auto content = [&](const char* run, const char* file) { return read_file(folder / run / file); };
  for (const char* file : {"lightcurves/lark.ecsv", "supernovae/lark.ecsv", "truth.ecsv", "passbands/lark-b.ecsv"}) {
    CHECK(content("one", file) == content("four", file));
  }
  CHECK(content("one", "lightcurves/lark.ecsv") != content("other", "lightcurves/lark.ecsv"));
}

TEST_CASE("what is written is read by the readers of real data") {
  SimulationOptions options = small_survey(10, 3);
  options.velocities.bulk_speed = 200;
  options.velocities.bulk_tabulated = true;
  options.population.mass_missing = 0.5;
  for (const bool magnitudes : {false, true}) {
    options.surveys[0].magnitudes = magnitudes;
    const ScratchFolder folder;
    const SimulatedSample sample = simulate(options, model());
    write_simulation(sample, options, folder.path());
    const auto catalogue = PassbandCatalogue::read(folder / "passbands/catalogue.toml", {});
    const Photometry photometry = read_photometry(folder / "lightcurves/lark.ecsv", catalogue, "lark");
    const SupernovaList list = read_supernovae(read_table(folder / "supernovae/lark.ecsv"), "lark");
    CHECK(photometry.set_aside.empty());
    CHECK(list.set_aside.empty());
    REQUIRE(photometry.light_curves.size() == 10);
    REQUIRE(list.supernovae.size() == 10);
    for (std::size_t i = 0; i < 10; ++i) {
      const Supernova& read = list.supernovae[i];
      const Supernova& made = sample.supernovae[i];
      CHECK(read.name == made.name);
      CHECK(std::abs(read.z_helio - made.z_helio) < 1e-6);
      CHECK(std::abs(read.v_pec - made.v_pec) < 0.1);
      CHECK(std::isnan(read.host_log_mass) == std::isnan(made.host_log_mass));
      const LightCurve& curve = sample.light_curves[i];
      if (!magnitudes) REQUIRE(photometry.light_curves[i].epochs.size() == curve.epochs.size());
      for (const Epoch& epoch : photometry.light_curves[i].epochs) {
        bool found = false;
        for (const Epoch& other : curve.epochs) {
          found = found || (std::abs(other.mjd - epoch.mjd) < 1e-4 &&
                            std::abs(other.flux - epoch.flux) < 2e-2 * other.flux_error + 1e-4 * other.flux);
        }
        CHECK(found);
      }
    }
    CHECK(read_table(folder / "truth.ecsv").meta("a_b") == fmt::format("{:.6f}", sample.a_b));
  }
}

TEST_CASE("light curves scatter about the truth as the fit's covariance says") {
  SimulationOptions options = small_survey(150, 8);
  const SimulatedSample sample = simulate(options, model());
  const PreparedTemplate prepared(model());
  double chi2 = 0;
  double count = 0;
  for (std::size_t i = 0; i < sample.light_curves.size(); ++i) {
    const SupernovaTruth& truth = sample.truths[i];
    Supernova supernova = sample.supernovae[i];
    supernova.z_helio = truth.z_helio;
    supernova.mw_ebv = truth.mw_ebv;
    const ObservedBands observed =
        observed_bands(sample.light_curves[i], supernova, prepared, sample.catalogue, Extinction(), true);
    const Parameters at(truth.t_0 - observed.reference_mjd, truth.m_b, truth.s, truth.c);
    Selection all;
    for (std::size_t k = 0; k < observed.observations.size(); ++k) all.push_back(k);
    Eigen::VectorXd flux;
    FluxSlopes slopes;
    model_flux(observed, all, at, flux, slopes);
    Eigen::VectorXd residual(flux.size());
    for (Eigen::Index k = 0; k < flux.size(); ++k) {
      residual[k] = observed.observations[static_cast<std::size_t>(k)].flux - flux[k];
    }
    Noise(observed, all, model(), at, flux, {}, true).whiten(residual);
    chi2 += residual.squaredNorm();
    count += static_cast<double>(flux.size());
  }
  // χ² of n independent normal deviates is n ± sqrt(2n); the fit's own band tables add at most 0.2 mmag.
  CHECK(count > 4000);
  CHECK(std::abs(chi2 - count) < 4 * std::sqrt(2 * count));
}

TEST_CASE("fits of simulated light curves find the truth within their errors") {
  SimulationOptions options = small_survey(200, 21);
  const SimulatedSample sample = simulate(options, model());
  const LightCurveFits fits =
      fit_all(sample.light_curves, sample.supernovae, PreparedTemplate(model()), sample.catalogue, Extinction());
  CHECK(fits.set_aside.empty());
  Eigen::Vector4d sum = Eigen::Vector4d::Zero();
  Eigen::Vector4d squares = Eigen::Vector4d::Zero();
  double n = 0;
  for (std::size_t i = 0; i < fits.fits.size(); ++i) {
    const LightCurveFit& fit = fits.fits[i];
    if (!fit.trusted()) continue;
    const SupernovaTruth& truth = sample.truths[i];
    const Eigen::Vector4d off(fit.t_0 - truth.t_0, fit.m_b - truth.m_b, fit.s - truth.s, fit.c - truth.c);
    const Eigen::Vector4d pull = off.cwiseQuotient(fit.covariance.diagonal().cwiseSqrt());
    sum += pull;
    squares += pull.cwiseAbs2();
    ++n;
  }
  CHECK(n > 150);
  for (int k = 0; k < 4; ++k) {
    CAPTURE(k);
    // Four errors of a mean, and of a width: 1/√n and 1/√(2n).
    CHECK(std::abs(sum[k] / n) < 4 / std::sqrt(n));
    CHECK(std::abs(std::sqrt(squares[k] / n) - 1) < 4 / std::sqrt(2 * n));
  }
}

TEST_CASE("a zero point that is wrong moves the tabulated fluxes by as much") {
  SimulationOptions options = small_survey(3, 5);
  const SimulatedSample right = simulate(options, model());
  options.passbands[1].zero_point_shift = 0.1;
  const SimulatedSample wrong = simulate(options, model());
  for (std::size_t i = 0; i < right.light_curves[0].epochs.size(); ++i) {
    const Epoch& a = right.light_curves[0].epochs[i];
    const Epoch& b = wrong.light_curves[0].epochs[i];
    const bool shifted = right.light_curves[0].passbands[a.passband] == "lark-g";
    CHECK(b.flux / a.flux == Approx(shifted ? std::pow(10, -0.04) : 1.0));
  }
  CHECK(wrong.catalogue.at("lark-g").passband.mean_wavelength() ==
        right.catalogue.at("lark-g").passband.mean_wavelength());
}

TEST_CASE("selection keeps what it should") {
  SimulationOptions options = small_survey(40, 6);
  options.surveys[0].peak_limit = 16.5;
  options.surveys[0].detections = 3;
  options.surveys[0].detection_snr = 20;
  const SimulatedSample sample = simulate(options, model());
  CHECK(sample.truths.size() == 40);
  for (std::size_t i = 0; i < 40; ++i) {
    CHECK(sample.truths[i].m_b < 16.5);
    CHECK(is_detected(options.surveys[0], sample.light_curves[i]));
  }
  options.surveys[0].peak_limit = 5;
  const std::string said = message_of<InputError>([&] { simulate(options, model()); });
  CHECK(said.find("survey \"lark\" finds none") != std::string::npos);
}

TEST_CASE("a second survey shares supernovae with the first") {
  SimulationOptions options = small_survey(6, 6);
  SimulatedSurvey second = options.surveys[0];
  second.name = std::string("wren");
  second.prefix = std::string("W");
  second.supernovae = 2;
  second.shared_with = "lark";
  second.shared = 3;
  second.bands = {{"lark-g", 20.0}, {"lark-r", 20.0}};
  options.surveys.push_back(second);
  const SimulatedSample sample = simulate(options, model());
  CHECK(sample.truths.size() == 8);
  REQUIRE(sample.supernovae.size() == 11);
  std::multiset<std::string> names;
  for (const Supernova& supernova : sample.supernovae) names.insert(supernova.name);
  CHECK(names.count("L-001") == 2);
  CHECK(names.count("L-004") == 1);
  CHECK(names.count("W-002") == 1);
  const Supernova& again = sample.supernovae[8];
  CHECK(again.name == "L-001");
  CHECK(again.survey == "wren");
  CHECK(again.z_helio == sample.supernovae[0].z_helio);
  CHECK(sample.light_curves[8].passbands == std::vector<std::string>{"lark-g", "lark-r"});
}

TEST_CASE("summaries are drawn with their covariance about the same truth") {
  const SimulationOptions options = small_survey(4000, 9);
  const auto summaries = simulate_summaries(options);
  REQUIRE(summaries.size() == 4000);
  double chi2 = 0;
  for (const SimulatedSummary& one : summaries) {
    const Eigen::Vector3d off = one.measured - Eigen::Vector3d(one.truth.m_b, one.truth.s, one.truth.c);
    chi2 += off.dot(one.covariance.inverse() * off);
  }
  CHECK(std::abs(chi2 - 12000) < 4 * std::sqrt(24000.0));
  CHECK(simulate_summaries(options)[17].measured == summaries[17].measured);
}

TEST_CASE("settings that cannot be are named") {
  const auto complaint = [](const auto& change) {
    SimulationOptions options = small_survey(3, 1);
    change(options);
    return message_of<InputError>([&] { check_simulation(options); });
  };
  CHECK(complaint([](auto& o) { o.surveys[0].bands[2].passband = "lark-rr"; }).find("did you mean \"lark-r\"") !=
        std::string::npos);
  CHECK(complaint([](auto& o) { o.surveys[0].z_min = 0.5; }).find("z_min of survey \"lark\"") != std::string::npos);
  CHECK(complaint([](auto& o) { o.population.s_min = 1.5; }).find("s_min") != std::string::npos);
  CHECK(complaint([](auto& o) { o.passbands[1].id = "lark-b"; }).find("given twice") != std::string::npos);
  CHECK(complaint([](auto& o) {
          o.surveys[0].shared = 2;
          o.surveys[0].shared_with = "robin";
        }).find("no earlier survey") != std::string::npos);
  CHECK(complaint([](auto& o) { o.surveys.clear(); }).find("no survey") != std::string::npos);
  CHECK(complaint([](auto&) {}).empty());
}
