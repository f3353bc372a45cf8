#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>

#include "hubbleflow/covariance_model.h"
#include "hubbleflow/intercept.h"
#include "hubbleflow/velocity_covariance.h"
#include "noisy_flow.h"
#include "sky/position.h"

using namespace thirdrung;
using thirdrung::testing::draw;
using thirdrung::testing::exact_flow;

// Errors are injected where they arise, not as draws from C: a zero point of every survey, a scale of the Milky Way
// reddening, and peculiar velocities drawn from linear theory that change redshift and flux. The stated error must
// cover the truth 68 +- 4% and 95 +- 2.5% of the time, with a mean bias below a tenth of it.
TEST_CASE("stated error covers the truth with injected systematics") {
  const FlowSample truth = exact_flow(150, 0.71, 71);
  const std::size_t n = truth.supernovae.size();
  const auto size = static_cast<Eigen::Index>(n);
  Deviates deviates(72);
  std::vector<double> ebv(n);
  for (double& e : ebv) e = -0.05 * std::log(deviates.uniform());
  const double zero_point = 0.012;
  const double reddening_scale = 0.05;
  const double own = 0.13;
  VelocityCovarianceOptions velocity_options;
  const Eigen::MatrixXd velocity = radial_velocity_covariance(truth.supernovae, velocity_options);
  const Eigen::MatrixXd lower = velocity.llt().matrixL();

  CovarianceModel model;
  for (const auto& s : truth.supernovae) model.supernovae.push_back(s.name);
  model.parts.push_back(constant_part("scatter", n, own));
  for (const char* survey : {"east", "west", "high"}) {
    SystematicShift shift{survey, "zero point", zero_point, "mag", Eigen::VectorXd::Zero(size)};
    for (std::size_t i = 0; i < n; ++i) {
      if (truth.supernovae[i].surveys.front() == survey) shift.shift[static_cast<Eigen::Index>(i)] = zero_point;
    }
    model.systematics.push_back(shift);
  }
  // Too little taken off: magnitude too faint by R_B E(B-V) less beta times the same of colour: (4.1 - 3.0) E(B-V).
  SystematicShift dust{"reddening scale", "Milky Way", reddening_scale, "", Eigen::VectorXd(size)};
  for (std::size_t i = 0; i < n; ++i) dust.shift[static_cast<Eigen::Index>(i)] = reddening_scale * 1.1 * ebv[i];
  model.systematics.push_back(dust);

  InterceptOptions options;
  options.z_min = 0.0;  // a limit in the observed redshift would select on the velocities themselves
  options.z_max = 1.0;
  int within_one = 0;
  int within_two = 0;
  double bias = 0.0;
  const int surveys = 1200;
  for (int k = 0; k < surveys; ++k) {
    FlowSample sample = truth;
    const Eigen::VectorXd v = draw(lower, deviates) / 299792.458;
    const double offsets[] = {zero_point * deviates.normal(), zero_point * deviates.normal(),
                              zero_point * deviates.normal()};
    const double scale = reddening_scale * deviates.normal();
    for (std::size_t i = 0; i < n; ++i) {
      FlowSupernova& s = sample.supernovae[i];
      const double doppler = 1.0 + v[static_cast<Eigen::Index>(i)];
      s.z_flow = (1.0 + s.z_flow) * doppler - 1.0;
      s.z_helio = (1.0 + s.z_helio) * doppler - 1.0;
      s.m_b_standardised +=
          10.0 * std::log10(doppler) + own * deviates.normal() + offsets[i % 3] + scale * 1.1 * ebv[i];
    }
    // As a run would, with the response at the redshifts it has; the velocities' own covariance hardly depends on them.
    CovarianceModel total = model;
    Eigen::VectorXd response(size);
    for (std::size_t i = 0; i < n; ++i) {
      response[static_cast<Eigen::Index>(i)] = 5.0 * velocity_response(sample.supernovae[i].z_flow, {}) / 299792.458;
    }
    total.parts.push_back({"velocities", "statistical", {}, velocity.cwiseProduct(response * response.transpose())});
    sample.covariance = total.total();
    const InterceptResult result = fit_intercept(sample, options);
    const double pull = (result.a_b - 0.71) / result.error;
    bias += pull / surveys;
    within_one += std::abs(pull) < 1.0 ? 1 : 0;
    within_two += std::abs(pull) < 1.959964 ? 1 : 0;
  }
  const double one = 100.0 * within_one / surveys;
  const double two = 100.0 * within_two / surveys;
  fmt::print("coverage: {:.1f}% and {:.1f}%, mean bias {:+.3f} of the error\n", one, two, bias);
  CHECK(one == Approx(68.3).margin(4.0));
  CHECK(two == Approx(95.0).margin(2.5));
  CHECK(std::abs(bias) < 0.1);
}
