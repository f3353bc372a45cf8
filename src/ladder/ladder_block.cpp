#include "ladder/ladder_block.h"

#include <fmt/format.h>

#include <algorithm>

namespace thirdrung {

namespace {

/// A part of the supernovae's covariance with nothing in the rows of the hosts.
CovariancePart with_hosts(const CovariancePart& part, Eigen::Index hosts) {
  CovariancePart out = part;
  if (part.diagonal.size() > 0) {
    out.diagonal.conservativeResize(part.diagonal.size() + hosts);
    out.diagonal.tail(hosts).setZero();
  }
  if (part.matrix.size() > 0) {
    const Eigen::Index n = part.matrix.rows();
    out.matrix = Eigen::MatrixXd::Zero(n + hosts, n + hosts);
    out.matrix.topLeftCorner(n, n) = part.matrix;
  }
  return out;
}

CovarianceModel whole_uncertainty(const CovarianceModel& supernovae, const HostDistances& distances) {
  const auto n = static_cast<Eigen::Index>(supernovae.supernovae.size());
  const auto hosts = static_cast<Eigen::Index>(distances.hosts.size());
  CovarianceModel out;
  out.supernovae = supernovae.supernovae;
  out.supernovae.insert(out.supernovae.end(), distances.hosts.begin(), distances.hosts.end());
  for (const CovariancePart& part : supernovae.parts) out.parts.push_back(with_hosts(part, hosts));
  CovariancePart moduli;
  moduli.name = "host distances";
  moduli.matrix = Eigen::MatrixXd::Zero(n + hosts, n + hosts);
  moduli.matrix.bottomRightCorner(hosts, hosts) = distances.covariance;
  out.parts.push_back(std::move(moduli));
  for (SystematicShift shift : supernovae.systematics) {
    shift.shift.conservativeResize(n + hosts);
    shift.shift.tail(hosts).setZero();
    out.systematics.push_back(std::move(shift));
  }
  out.correlation = supernovae.correlation;
  check_covariance_model(out);
  return out;
}

void add_rows(const LadderSupernovae& supernovae, std::vector<LadderRow>& rows) {
  for (const Calibrator& one : supernovae.calibrators.calibrators)
    rows.push_back({LadderRowKind::calibrator, one.supernova, one.host});
  for (const FlowSupernova& one : supernovae.flow) rows.push_back({LadderRowKind::hubble_flow, one.name, ""});
  for (const std::string& host : supernovae.calibrators.distances.hosts)
    rows.push_back({LadderRowKind::host, host, host});
}

void add_parameters(const LadderSupernovae& supernovae, const InterceptOptions& intercept, LadderBlock& block) {
  for (const std::string& host : supernovae.calibrators.distances.hosts)
    block.parameters.push_back({"mu " + host, "mag"});
  block.absolute_magnitude = static_cast<Eigen::Index>(block.parameters.size());
  block.five_log10_h0 = block.absolute_magnitude + 1;
  block.parameters.push_back({"M_B", "mag"});
  block.parameters.push_back({"five_log10_H0", "mag"});
  if (intercept.fit_q0) block.parameters.push_back({"q0", ""});
  if (!intercept.fit_dipole) return;
  for (const char* axis : {"x", "y", "z"}) block.parameters.push_back({fmt::format("velocity {}", axis), "km / s"});
}

/// The options with the expansion that the Hubble flow itself asks for, where q0 is fitted.
InterceptOptions at_fitted_q0(const LadderSupernovae& supernovae, const InterceptOptions& intercept) {
  if (!intercept.fit_q0) return intercept;
  std::vector<bool> members(supernovae.uncertainty.supernovae.size(), true);
  std::fill_n(members.begin(), supernovae.calibrators.calibrators.size(), false);
  const CovarianceModel model = cut(supernovae.uncertainty, members);
  InterceptOptions out = intercept;
  const InterceptResult result = fit_intercept({supernovae.flow, model.total(), model.weighting()}, intercept);
  Expansion& expansion = out.flow.expansion;
  expansion = expansion.form == Expansion::Form::series ? Expansion::series(result.q0.value(), expansion.j0)
                                                        : Expansion::flat_lcdm((result.q0.value() + 1.0) / 1.5);
  return out;
}

}  // namespace

std::string name_of(LadderRowKind kind) {
  switch (kind) {
    case LadderRowKind::calibrator:
      return "calibrator";
    case LadderRowKind::hubble_flow:
      return "hubble_flow";
    case LadderRowKind::host:
      return "host";
  }
  return "";
}

Eigen::Index LadderBlock::first(LadderRowKind kind) const {
  const auto found = std::find_if(rows.begin(), rows.end(), [kind](const LadderRow& row) { return row.kind == kind; });
  return found - rows.begin();
}

Eigen::Index LadderBlock::count(LadderRowKind kind) const {
  return std::count_if(rows.begin(), rows.end(), [kind](const LadderRow& row) { return row.kind == kind; });
}

LadderBlock make_ladder_block(const LadderSupernovae& supernovae, const InterceptOptions& given) {
  const InterceptOptions intercept = at_fitted_q0(supernovae, given);
  const CalibratorList& list = supernovae.calibrators;
  LadderBlock block;
  add_rows(supernovae, block.rows);
  add_parameters(supernovae, intercept, block);
  const auto calibrators = static_cast<Eigen::Index>(list.calibrators.size());
  const auto flow = static_cast<Eigen::Index>(supernovae.flow.size());
  const auto hosts = static_cast<Eigen::Index>(list.distances.hosts.size());
  const Eigen::Index others = static_cast<Eigen::Index>(block.parameters.size()) - hosts - 2;

  block.y.resize(calibrators + flow + hosts);
  block.y.head(calibrators) = supernovae.m_b_standardised;
  // A single intercept is log10(H0 d_L) - 0.2 m_B0.
  block.y.segment(calibrators, flow) = -5.0 * single_intercepts(supernovae.flow, intercept.flow).array() - 25.0;
  block.y.tail(hosts) = list.distances.modulus;

  block.design = Eigen::MatrixXd::Zero(block.y.size(), static_cast<Eigen::Index>(block.parameters.size()));
  for (Eigen::Index i = 0; i < calibrators; ++i) block.design(i, list.host_of(static_cast<std::size_t>(i))) = 1.0;
  block.design.col(block.absolute_magnitude).head(calibrators + flow).setOnes();
  block.design.col(block.five_log10_h0).segment(calibrators, flow).setConstant(-1.0);
  block.design.bottomLeftCorner(hosts, hosts).setIdentity();
  if (others > 0) {
    block.design.block(calibrators, hosts + 2, flow, others) =
        -5.0 * intercept_design(supernovae.flow, intercept).rightCols(others);
  }
  block.uncertainty = whole_uncertainty(supernovae.uncertainty, list.distances);
  return block;
}

}  // namespace thirdrung
