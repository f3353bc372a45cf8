#include <Eigen/Dense>
#include <catch2/catch.hpp>

#include "lightcurve/noise.h"
#include "lightcurve/synthetic_survey.h"

using namespace thirdrung;
using namespace thirdrung::testing;

// Source: the covariance written out as a full matrix and inverted by Eigen. Tolerance: rounding.
TEST_CASE("whitening is exact, and so is the determinant") {
  const SpectralTemplate model = synthetic_template();
  const PreparedTemplate prepared(model);
  const PassbandCatalogue catalogue = invented_catalogue();
  const Truth truth;
  const LightCurve light_curve = observe(truth, model, catalogue, {"blue", "red", "dark"}, -10, 40, 10, 0.02);
  const ObservedBands observed =
      observed_bands(light_curve, supernova_of(truth), prepared, catalogue, Extinction(), true);
  const Parameters at(truth.t_0 - observed.reference_mjd, truth.m_b, truth.s, truth.c);
  const Selection selection = select(observed, model, at, {});
  Eigen::VectorXd flux;
  FluxSlopes slopes;
  model_flux(observed, selection, at, flux, slopes);
  std::vector<double> weights(selection.size(), 1.0);
  weights[3] = 0.2;
  const Noise noise(observed, selection, model, at, flux, weights, true);

  const auto n = static_cast<Eigen::Index>(selection.size());
  Eigen::MatrixXd covariance = Eigen::MatrixXd::Zero(n, n);
  for (Eigen::Index i = 0; i < n; ++i) {
    const Observation& a = observed.observations[selection[static_cast<std::size_t>(i)]];
    const ObservedBand& band = observed.bands[a.band];
    const double scatter = model.epoch_scatter(phase_of(observed, a, at), band.mean_wavelength) * flux[i];
    covariance(i, i) = (a.variance + scatter * scatter) / weights[static_cast<std::size_t>(i)];
    for (Eigen::Index k = 0; k < n; ++k) {
      if (observed.observations[selection[static_cast<std::size_t>(k)]].band == a.band) {
        covariance(i, k) += band.colour_scatter * band.colour_scatter * flux[i] * flux[k];
      }
    }
  }
  const Eigen::VectorXd r = Eigen::VectorXd::LinSpaced(n, -1, 2).cwiseProduct(flux);
  Eigen::VectorXd whitened = r;
  noise.whiten(whitened);
  CHECK(whitened.squaredNorm() == Approx(r.dot(covariance.llt().solve(r))).epsilon(1e-10));
  const Eigen::MatrixXd factor = covariance.llt().matrixL();
  CHECK(noise.log_determinant() == Approx(2 * factor.diagonal().array().log().sum()).epsilon(1e-10));
}

// Source: central differences of the model flux. Tolerance: their truncation.
TEST_CASE("slopes of the model flux are those of its values") {
  const SpectralTemplate model = synthetic_template();
  const PreparedTemplate prepared(model);
  const PassbandCatalogue catalogue = invented_catalogue();
  const Truth truth;
  const LightCurve light_curve = observe(truth, model, catalogue, {"blue", "red"}, -10, 40, 7, 0.02);
  const ObservedBands observed =
      observed_bands(light_curve, supernova_of(truth), prepared, catalogue, Extinction(), true);
  const Parameters at(truth.t_0 - observed.reference_mjd + 1, truth.m_b, 0.9, 0.2);
  const Selection selection = select(observed, model, at, {});
  Eigen::VectorXd flux, below, above;
  FluxSlopes slopes, unused;
  model_flux(observed, selection, at, flux, slopes);
  for (Eigen::Index k = 0; k < 4; ++k) {
    Parameters step = Parameters::Zero();
    step[k] = 1e-5;
    model_flux(observed, selection, at - step, below, unused);
    model_flux(observed, selection, at + step, above, unused);
    const Eigen::VectorXd numerical = (above - below) / 2e-5;
    CHECK((numerical - slopes.col(k)).cwiseAbs().maxCoeff() < 1e-6 * flux.cwiseAbs().maxCoeff());
  }
}
