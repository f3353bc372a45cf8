#pragma once

#include <span>

#include "standardisation/standardisation.h"

namespace thirdrung {

/// Settings of the ordinary fit.
struct OrdinaryOptions {
  HostMassOptions host_mass;
  int most_rounds = 200;
};

/// Weighted least squares of m_b - modulus on (s - 1, c, P - 1/2) as if s and c were exact: for comparison only.
///
/// The weights take in the errors of s and c and a sigma_int that makes chi2 equal the degrees of freedom, both updated
/// until nothing moves; the slopes themselves are those of a regression on noisy variables, and so come out too small
/// by about width^2 / (width^2 + error^2) (Kelly 2007, ApJ 665, 1489, on regression dilution). A remark says so. Throws
/// NoResultError for fewer than 10 supernovae.
StandardisationResult fit_ordinary(std::span<const StandardisationDatum> data, const OrdinaryOptions& options = {});

}  // namespace thirdrung
