#include <array>
#include <catch2/catch.hpp>
#include <cmath>

#include "base/chi_square.h"
#include "lightcurve/fit.h"
#include "lightcurve/synthetic_survey.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

const std::vector<std::string> four = {"blue", "green", "red", "dark"};

struct Lab {
  SpectralTemplate model = synthetic_template();
  PreparedTemplate prepared{model};
  PassbandCatalogue catalogue = invented_catalogue();
  Extinction dust;

  LightCurveFit fit(const Truth& truth, const LightCurve& light_curve, const FitOptions& options = {}) const {
    return fit_light_curve(light_curve, supernova_of(truth), prepared, catalogue, dust, options);
  }
};

bool has(const LightCurveFit& fit, Remark remark) {
  return std::find(fit.remarks.begin(), fit.remarks.end(), remark) != fit.remarks.end();
}

}  // namespace

// Source: the direct integral of the same template over a 5 angstrom grid, without noise. Tolerance: what 0.2 mmag of
// the band tables can do to each parameter.
TEST_CASE("a noiseless light curve gives its parameters back") {
  const Lab lab;
  for (const Truth& truth : {Truth{}, Truth{58000, 18, 0.75, 0.4, 0.08, 0.3}, Truth{58000, 14, 1.2, -0.15, 0.01, 0.0},
                             Truth{58000, 19, 0.9, 1.0, 0.05, 0.02}}) {
    const LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01);
    const LightCurveFit fit = lab.fit(truth, light_curve);
    INFO("s = " << truth.s << " c = " << truth.c << ": " << text_of(fit.remarks));
    CHECK(fit.t_0 == Approx(truth.t_0).margin(0.01));
    CHECK(fit.m_b == Approx(truth.m_b).margin(1e-3));
    CHECK(fit.s == Approx(truth.s).margin(1e-3));
    CHECK(fit.c == Approx(truth.c).margin(1e-3));
    CHECK(fit.chi2 < 0.01);
    CHECK(fit.trusted());
    CHECK(fit.bands_used == four);
    CHECK(fit.epochs_used <= static_cast<int>(light_curve.epochs.size()));
    CHECK(fit.epochs_used >= 52);
    CHECK(fit.dof == fit.epochs_used - 4);
    CHECK(fit.first_phase == Approx(-12).margin(0.02));
    CHECK(fit.dm15_b == Approx(lab.model.dm15_b(fit.s, fit.c)).margin(1e-3));
  }
}

// Source: the noise that was put in. 300 light curves: pulls have mean 0 ± 0.058 and width 1 ± 0.041; tolerance
// about 3.5 of these errors. χ² per degree of freedom has mean 1.
TEST_CASE("errors and chi2 are those of the noise put in") {
  const Lab lab;
  std::mt19937_64 generator(20240607);
  constexpr int count = 300;
  Eigen::Vector4d sum = Eigen::Vector4d::Zero();
  Eigen::Vector4d squares = Eigen::Vector4d::Zero();
  double chi2 = 0;
  double dof = 0;
  std::array<double, 4> band_pulls{};
  std::array<double, 4> band_freedom{};
  for (int i = 0; i < count; ++i) {
    const Truth truth{58000, 17, 0.85 + 0.3 * i / count, -0.1 + 0.3 * ((i * 37) % count) / count, 0.04, 0.1};
    const LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 5, 0.02, &generator);
    const LightCurveFit fit = lab.fit(truth, light_curve);
    REQUIRE(fit.trusted());
    const Eigen::Vector4d off(fit.t_0 - truth.t_0, fit.m_b - truth.m_b, fit.s - truth.s, fit.c - truth.c);
    const Eigen::Vector4d pull = off.cwiseQuotient(fit.covariance.diagonal().cwiseSqrt());
    sum += pull;
    squares += pull.cwiseAbs2();
    chi2 += fit.chi2;
    dof += fit.dof;
    for (const FittedEpoch& epoch : fit.epochs) {
      const std::size_t band = light_curve.epochs[epoch.epoch].passband;
      band_pulls[band] += epoch.pull * epoch.pull;
      band_freedom[band] += epoch.freedom;
    }
  }
  // What a fit takes out of the pulls differs between bands; each has a χ² of 1 by its own freedom. 3400 pulls a band
  // in 300 light curves with a common colour scatter: ± 0.04.
  for (std::size_t band = 0; band < four.size(); ++band) {
    CAPTURE(band);
    CHECK(band_pulls[band] / band_freedom[band] == Approx(1).margin(0.1));
  }
  for (Eigen::Index k = 0; k < 4; ++k) {
    INFO("parameter " << k);
    CHECK(sum[k] / count == Approx(0).margin(0.2));
    CHECK(std::sqrt(squares[k] / count) == Approx(1).margin(0.15));
  }
  CHECK(chi2 / dof == Approx(1).margin(0.03));
}

TEST_CASE("a light curve that starts late, or ends before the peak, is fitted and says so") {
  const Lab lab;
  const Truth truth;
  const auto late = lab.fit(truth, observe(truth, lab.model, lab.catalogue, four, 12, 44, 4, 0.01));
  CHECK(late.t_0 == Approx(truth.t_0).margin(0.5));
  CHECK(has(late, Remark::starts_late));
  CHECK(has(late, Remark::t_0_outside_data));
  CHECK_FALSE(late.trusted());
  // Between +5 and +10 d the error of t_0 decides: the same epochs with small errors and with large ones.
  const auto dated = lab.fit(truth, observe(truth, lab.model, lab.catalogue, four, 7, 44, 4, 0.01));
  CHECK(std::sqrt(dated.covariance(0, 0)) < 1);
  CHECK(dated.trusted());
  CHECK(has(dated, Remark::t_0_outside_data));
  const auto undated = lab.fit(truth, observe(truth, lab.model, lab.catalogue, four, 7, 44, 8, 0.06));
  CHECK(std::sqrt(undated.covariance(0, 0)) > 1.1);
  CHECK(has(undated, Remark::starts_late));
  CHECK_FALSE(undated.trusted());
  const auto early = lab.fit(truth, observe(truth, lab.model, lab.catalogue, four, -13, -4, 1, 0.003));
  CHECK(early.t_0 == Approx(truth.t_0).margin(2));
  CHECK(has(early, Remark::t_0_outside_data));
}

TEST_CASE("one band cannot tell the colour") {
  const Lab lab;
  const Truth truth;
  const auto fit = lab.fit(truth, observe(truth, lab.model, lab.catalogue, {"green"}, -12, 44, 4, 0.01));
  CHECK(has(fit, Remark::one_band));
  CHECK_FALSE(fit.trusted());
  CHECK(std::sqrt(fit.covariance(3, 3)) == Approx(0.3).epsilon(0.02));
  CHECK(fit.t_0 == Approx(truth.t_0).margin(0.3));
}

TEST_CASE("three epochs are held by wide priors") {
  const Lab lab;
  const Truth truth;
  const auto fit = lab.fit(truth, observe(truth, lab.model, lab.catalogue, {"blue", "green", "red"}, 0, 1, 4, 0.01));
  CHECK(fit.epochs_used == 3);
  CHECK(fit.dof == 0);
  CHECK(fit.fit_probability == 1);
  CHECK(has(fit, Remark::too_few_epochs));
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("a band outside the template is left out with its reason") {
  const Lab lab;
  const Truth truth{58000, 16.5, 1.0, 0.05, 0.09, 0.05};
  const auto fit =
      lab.fit(truth, observe(truth, lab.model, lab.catalogue, {"violet", "blue", "red"}, -12, 44, 4, 0.01));
  REQUIRE(fit.bands_left_out.size() == 1);
  CHECK(fit.bands_left_out[0].passband == "violet");
  CHECK_THAT(fit.bands_left_out[0].reason, Catch::Contains("blueward of the template's 3000-9200"));
  CHECK(fit.bands_used == std::vector<std::string>{"blue", "red"});
  CHECK(fit.trusted());
}

TEST_CASE("parameters beyond the bounds stop there and are not trusted") {
  const Lab lab;
  const Truth truth{58000, 16.5, 1.3, 0.8, 0.02, 0.05};
  FitOptions options;
  options.s_max = 1.2;
  options.c_max = 0.5;
  const auto fit = lab.fit(truth, observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01), options);
  CHECK(fit.s == Approx(1.2).margin(1e-3));
  CHECK(fit.c == Approx(0.5).margin(1e-3));
  CHECK(has(fit, Remark::s_at_bound));
  CHECK(has(fit, Remark::c_at_bound));
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("an impossible chi2 is noticed") {
  const Lab lab;
  const Truth truth;
  LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01);
  for (std::size_t i = 0; i < light_curve.epochs.size(); i += 2) light_curve.epochs[i].flux *= 1.3;
  const auto fit = lab.fit(truth, light_curve);
  CHECK(fit.fit_probability < 1e-6);
  CHECK(has(fit, Remark::improbable));
}

TEST_CASE("the robust loss finds the epochs that do not belong") {
  const Lab lab;
  const Truth truth;
  std::mt19937_64 generator(7);
  LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01, &generator);
  light_curve.epochs[5].flux *= 2;
  light_curve.epochs[20].flux = -light_curve.epochs[20].flux;
  const auto plain = lab.fit(truth, light_curve);
  FitOptions options;
  options.robust = true;
  const auto robust = lab.fit(truth, light_curve, options);
  CHECK(plain.mistrusted_epochs() == 0);
  CHECK(robust.mistrusted_epochs() == 2);
  CHECK(robust.epochs[5].mistrusted);
  CHECK(robust.epochs[20].mistrusted);
  CHECK(has(robust, Remark::epochs_mistrusted));
  CHECK(robust.trusted());
  CHECK(robust.dof == robust.epochs_used - 4);
  CHECK(robust.epochs_used == plain.epochs_used - 2);
  CHECK(robust.chi2 < 2 * robust.dof);
  CHECK(plain.chi2 > 3 * plain.dof);
  CHECK(std::abs(robust.m_b - truth.m_b) < 3 * std::sqrt(robust.covariance(1, 1)));
}

TEST_CASE("the robust loss does not hide a template that fits nowhere") {
  const Lab lab;
  const Truth truth;
  FitOptions options;
  options.robust = true;
  // Every second epoch off by ten of its errors: too many to dismiss.
  LightCurve half = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01);
  for (std::size_t i = 0; i < half.epochs.size(); i += 2) half.epochs[i].flux += 10 * half.epochs[i].flux_error;
  CHECK_FALSE(lab.fit(truth, half, options).trusted());
  // Errors stated three times too small: no epoch is wild, and none fits.
  std::mt19937_64 generator(3);
  LightCurve all = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.05, &generator);
  for (Epoch& epoch : all.epochs) epoch.flux_error /= 3;
  options.template_scatter = false;
  const auto fit = lab.fit(truth, all, options);
  CHECK(has(fit, Remark::improbable));
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("two peaks in sparse data compete") {
  const Lab lab;
  const Truth first;
  Truth second = first;
  second.t_0 += 60;
  // One pair of epochs at each of two peaks: either may be the supernova, and the other noise.
  LightCurve light_curve = observe(first, lab.model, lab.catalogue, {"blue", "red"}, -4, 6, 5, 0.6);
  const LightCurve other = observe(second, lab.model, lab.catalogue, {"blue", "red"}, -4, 6, 5, 0.6);
  light_curve.epochs.insert(light_curve.epochs.end(), other.epochs.begin(), other.epochs.end());
  const auto fit = lab.fit(first, light_curve);
  REQUIRE(fit.competing);
  CHECK(std::abs(std::abs(fit.competing->t_0 - fit.t_0) - 60) < 10);
  CHECK(has(fit, Remark::competing_solution));
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("flux that is nowhere positive gives no fit but a reason") {
  const Lab lab;
  const Truth truth;
  LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01);
  for (Epoch& epoch : light_curve.epochs) epoch.flux = -std::abs(epoch.flux);
  const auto fit = lab.fit(truth, light_curve);
  CHECK(has(fit, Remark::no_positive_flux));
  CHECK(fit.epochs_used == 0);
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("a single epoch gives no fit but a reason") {
  const Lab lab;
  const Truth truth;
  LightCurve light_curve = observe(truth, lab.model, lab.catalogue, {"blue"}, -12, 44, 4, 0.01);
  light_curve.epochs.resize(1);
  const auto fit = lab.fit(truth, light_curve);
  CHECK(has(fit, Remark::undetermined));
  CHECK(fit.epochs_used == 0);
  CHECK_FALSE(std::isfinite(fit.m_b));
  CHECK_FALSE(fit.trusted());
}

TEST_CASE("a supernova without redshift or reddening is refused, and set aside among others") {
  const Lab lab;
  const Truth truth;
  const LightCurve light_curve = observe(truth, lab.model, lab.catalogue, four, -12, 44, 4, 0.01);
  Supernova none = supernova_of(truth);
  none.z_helio = missing_value;
  CHECK_THROWS_AS(fit_light_curve(light_curve, none, lab.prepared, lab.catalogue, lab.dust), InputError);
  none.z_helio = -0.01;
  CHECK_THROWS_AS(fit_light_curve(light_curve, none, lab.prepared, lab.catalogue, lab.dust), InputError);
  none.z_helio = 0.01;
  none.mw_ebv = missing_value;
  CHECK_THROWS_AS(fit_light_curve(light_curve, none, lab.prepared, lab.catalogue, lab.dust), InputError);

  LightCurve stray = light_curve;
  stray.supernova = "invented-2";
  const std::vector<LightCurve> all = {light_curve, stray};
  const std::vector<Supernova> known = {supernova_of(truth)};
  const auto fits = fit_all(all, known, lab.prepared, lab.catalogue, lab.dust);
  CHECK(fits.fits.size() == 1);
  REQUIRE(fits.set_aside.size() == 1);
  CHECK(fits.set_aside[0].supernova == "invented-2");
}

TEST_CASE("fits do not depend on the number of threads") {
  const Lab lab;
  std::mt19937_64 generator(11);
  std::vector<LightCurve> light_curves;
  std::vector<Supernova> supernovae;
  for (int i = 0; i < 20; ++i) {
    const Truth truth{58000, 17, 0.8 + 0.02 * i, 0.01 * i, 0.02 + 0.004 * i, 0.05};
    light_curves.push_back(observe(truth, lab.model, lab.catalogue, four, -8, 40, 6, 0.03, &generator));
    light_curves.back().supernova = "invented-" + std::to_string(i);
    supernovae.push_back(supernova_of(truth, light_curves.back().supernova));
  }
  const auto one = fit_all(light_curves, supernovae, lab.prepared, lab.catalogue, lab.dust, {}, 1);
  const auto four_threads = fit_all(light_curves, supernovae, lab.prepared, lab.catalogue, lab.dust, {}, 4);
  REQUIRE(one.fits.size() == 20);
  for (std::size_t i = 0; i < 20; ++i) {
    CHECK(one.fits[i].supernova == four_threads.fits[i].supernova);
    CHECK(one.fits[i].t_0 == four_threads.fits[i].t_0);
    CHECK(one.fits[i].covariance == four_threads.fits[i].covariance);
    CHECK(one.fits[i].chi2 == four_threads.fits[i].chi2);
  }
}

// Source: scipy 1.10, scipy.stats.chi2.sf. Tolerance: 1e-10 relative, two digits inside scipy's own accuracy.
TEST_CASE("chance of a larger chi2 agrees with scipy", "[published]") {
  const double reference[][3] = {
      {0.01, 1, 0.920344325445942},      {3.84, 1, 0.05004352124870519},       {1.5, 2, 0.4723665527410149},
      {5, 5, 0.4158801869955079},        {60, 56, 0.3328690840455234},         {20, 56, 0.9999977464659493},
      {250, 56, 2.4961598289403188e-26}, {1200, 1000, 1.2255942330622893e-05}, {900, 1000, 0.9892827619087102}};
  for (const auto& row : reference) {
    CHECK(chi_square_survival(row[0], static_cast<int>(row[1])) == Approx(row[2]).epsilon(1e-10));
  }
  CHECK(chi_square_survival(3.0, 0) == 1.0);
}
