#pragma once

#include <cmath>

#include "ladder/solve_ladder.h"

namespace thirdrung::testing {

/// Calibrators a, b (one host each) and two supernovae of a Hubble flow, all numbers given.
inline LadderSupernovae small_ladder(double m_b, double h0) {
  LadderSupernovae out;
  out.calibrators.calibrators = {{"a", "Elm", {}}, {"b", "Oak", {}}};
  out.calibrators.distances.hosts = {"Elm", "Oak"};
  out.calibrators.distances.modulus = Eigen::Vector2d(30.0, 31.5);
  out.calibrators.distances.covariance = Eigen::Matrix2d::Identity() * 0.02 + Eigen::Matrix2d::Constant(0.01);
  out.m_b_standardised = out.calibrators.distances.modulus.array() + m_b;
  for (const double z : {0.03, 0.07}) {
    FlowSupernova one;
    one.name = z < 0.05 ? "c" : "d";
    one.z_flow = one.z_helio = z;
    one.m_b_standardised = m_b + 5.0 * (log_expansion_term(z) - std::log10(h0)) + 25.0;
    out.flow.push_back(one);
  }
  out.uncertainty.supernovae = {"a", "b", "c", "d"};
  CovariancePart scatter;
  scatter.name = "intrinsic scatter";
  scatter.diagonal = Eigen::Vector4d(0.01, 0.01, 0.02, 0.02);
  out.uncertainty.parts = {scatter};
  return out;
}

}  // namespace thirdrung::testing
