#pragma once

#include <Eigen/Core>
#include <filesystem>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "hubbleflow/intercept.h"
#include "ladder/host_distances.h"

namespace thirdrung {

/// The supernovae of a ladder, all standardised with one set of coefficients.
struct LadderSupernovae {
  CalibratorList calibrators;        ///< At least one.
  Eigen::VectorXd m_b_standardised;  ///< Of the calibrators, in their order [mag].
  std::vector<FlowSupernova> flow;   ///< The Hubble flow: those within the redshift range of the intercept.
  CovarianceModel uncertainty;       ///< Of the magnitudes of both: calibrators first, then the flow.
};

/// What a row of a block is an observation of.
enum class LadderRowKind {
  calibrator,   ///< m_B0 of a calibrator = mu(host) + M_B.
  hubble_flow,  ///< m_B0 - 5 log10(H0 d_L) - 25 of a supernova in the Hubble flow = M_B - 5 log10 H0.
  host          ///< Measured modulus of a host = mu(host).
};
std::string name_of(LadderRowKind kind);

struct LadderRow {
  LadderRowKind kind = LadderRowKind::calibrator;
  std::string name;  ///< Of the supernova, or of the host.
  std::string host;  ///< Of calibrators and hosts; else "".
};

struct LadderParameter {
  std::string name;  ///< "mu <host>", "M_B", "five_log10_H0", and what the intercept fits besides.
  std::string unit;
};

/// Calibrators, their hosts and the Hubble flow as one linear system, y = L theta + noise of covariance C.
///
/// The moduli of the hosts are parameters of their own and their measurements rows of their own, so that a larger
/// ladder can put its own rows (Cepheids, anchors) in the place of the latter. Rows: calibrators, Hubble flow, hosts.
/// (The layout of a ladder as one linear system: Riess et al. 2022, ApJL 934, L7, sect. 4.)
struct LadderBlock {
  std::vector<LadderRow> rows;
  std::vector<LadderParameter> parameters;  ///< Moduli, M_B, five_log10_H0; then, where fitted, q0 and velocities.
  Eigen::VectorXd y;                        ///< [mag].
  Eigen::MatrixXd design;                   ///< L, one row a row, one column a parameter.
  CovarianceModel uncertainty;              ///< Of y, in its parts; its "supernovae" are the names of the rows.

  Eigen::Index absolute_magnitude = 0;  ///< Places among the parameters,
  Eigen::Index five_log10_h0 = 0;       ///< of the two that matter.

  /// Rows of one kind: first and number.
  Eigen::Index first(LadderRowKind kind) const;
  Eigen::Index count(LadderRowKind kind) const;
};

/// @param intercept expansion and what is fitted along, as for a_B; a fitted q0 is that of fit_intercept(), and the
/// parameter "q0" its difference from it.
/// Throws InputError for an uncertainty of the wrong size.
LadderBlock make_ladder_block(const LadderSupernovae& supernovae, const InterceptOptions& intercept);

}  // namespace thirdrung
