#include <fmt/format.h>

#include <catch2/catch.hpp>
#include <cmath>

#include "hubbleflow/variation.h"
#include "noisy_flow.h"

using namespace thirdrung;
using thirdrung::testing::exact_flow;

// A colour correction left off moves a_B by beta times the mean colour; over simulated surveys, colours redrawn each
// time, the stated error must describe the scatter of that shift.
TEST_CASE("error of a correction left off describes its scatter") {
  const FlowSample truth = exact_flow(120, 0.71, 61);
  Deviates deviates(62);
  const StandardisationCoefficients k{1.4, 3.0, 0.05, 0.1};
  double sum = 0.0;
  double square = 0.0;
  const int surveys = 300;
  for (int n = 0; n < surveys; ++n) {
    FlowSample sample = truth;
    std::vector<StandardisationDatum> data;
    for (std::size_t i = 0; i < 120; ++i) {
      StandardisationDatum d;
      d.name = sample.supernovae[i].name;
      const double c_error = 0.03;
      const double m_error = 0.05;
      const double c_noise = c_error * deviates.normal();
      const double m_noise = 0.5 * m_error * c_noise / c_error + std::sqrt(0.75) * m_error * deviates.normal();
      d.covariance << m_error * m_error, 0.0, 0.5 * m_error * c_error, 0.0, 1e-4, 0.0, 0.5 * m_error * c_error, 0.0,
          c_error * c_error;
      d.s = 1.0;
      d.c = 0.06 * deviates.normal() + c_noise;
      const double intrinsic = 0.1 * deviates.normal();
      sample.supernovae[i].m_b_standardised += m_noise - k.beta * c_noise + intrinsic;
      const Eigen::Vector3d a(1.0, k.alpha, -k.beta);
      sample.covariance(static_cast<Eigen::Index>(i), static_cast<Eigen::Index>(i)) =
          a.dot(d.covariance * a) - k.alpha * k.alpha * 1e-4 + 0.01;
      data.push_back(d);
    }
    const ScanFrame frame(sample, {});
    const ScanRow row = scan_variation(frame, without_correction(frame, data, k, {}, Correction::colour));
    CHECK(row.setting == "without colour");
    const double pull = row.delta_ab / row.delta_ab_error;
    sum += pull / surveys;
    square += pull * pull / surveys;
  }
  const double width = std::sqrt(square - sum * sum);
  fmt::print("pulls of a correction left off: mean {:+.3f}, width {:.3f}\n", sum, width);
  CHECK(width == Approx(1.0).margin(0.1));
}

TEST_CASE("a changed expansion as a variation") {
  const FlowSample sample = exact_flow(60, 0.71, 63);
  const ScanFrame frame(sample, {});
  Variation v{"expansion", "q0 = -0.45", sample.supernovae, frame.options().flow, {}, {}};
  v.flow.expansion.q0 = -0.45;
  InterceptOptions options;
  options.flow = v.flow;
  const ScanRow row = scan_variation(frame, v);
  CHECK(row.a_b == Approx(fit_intercept(sample, options).a_b).epsilon(1e-12));
  CHECK(row.delta_ab_error == 0.0);
}
