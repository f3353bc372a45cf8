#include "template/band_table.h"

#include <cmath>
#include <stdexcept>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// Place of the first monomial of total degree n; u^(n−b) v^b stands b places further.
constexpr std::size_t first_of_degree(std::size_t n) {
  return n * (n + 1) / 2;
}

/// Series of ln(1 + R) from the series R without its constant term, in place, to total degree 4.
///
/// With L_n and R_n the parts of total degree n (Euler's theorem on homogeneous functions, as in Knuth, "The Art of
/// Computer Programming", vol. 2, 4.7, for one variable): n L_n = n R_n − Σ_{k=1}^{n−1} k L_k R_{n−k}. The places of
/// the monomials are those of first_of_degree; r keeps R where L is not yet known.
void logarithm_of_series(double* r) {
  const double l1 = r[1], l2 = r[2];
  const double r3 = r[3], r4 = r[4], r5 = r[5], r6 = r[6], r7 = r[7], r8 = r[8], r9 = r[9];
  const double l3 = r3 - l1 * l1 / 2;
  const double l4 = r4 - l1 * l2;
  const double l5 = r5 - l2 * l2 / 2;
  const double l6 = r6 - (l1 * r3 + 2 * l3 * l1) / 3;
  const double l7 = r7 - (l1 * r4 + l2 * r3 + 2 * (l3 * l2 + l4 * l1)) / 3;
  const double l8 = r8 - (l1 * r5 + l2 * r4 + 2 * (l4 * l2 + l5 * l1)) / 3;
  const double l9 = r9 - (l2 * r5 + 2 * l5 * l2) / 3;
  r[3] = l3;
  r[4] = l4;
  r[5] = l5;
  r[6] = l6;
  r[7] = l7;
  r[8] = l8;
  r[9] = l9;
  r[10] -= (l1 * r6 + 2 * l3 * r3 + 3 * l6 * l1) / 4;
  r[11] -= (l1 * r7 + l2 * r6 + 2 * (l3 * r4 + l4 * r3) + 3 * (l6 * l2 + l7 * l1)) / 4;
  r[12] -= (l1 * r8 + l2 * r7 + 2 * (l3 * r5 + l4 * r4 + l5 * r3) + 3 * (l7 * l2 + l8 * l1)) / 4;
  r[13] -= (l1 * r9 + l2 * r8 + 2 * (l4 * r5 + l5 * r4) + 3 * (l8 * l2 + l9 * l1)) / 4;
  r[14] -= (l2 * r9 + 2 * l5 * r5 + 3 * l9 * l2) / 4;
}

/// Moments Σ_j flux(n, j) weight(j, b) of `width` weights for four nodes: sums that stay in registers.
template <int width>
void moments_of_four_nodes(const double* flux, Eigen::Index stride, const double* weight, Eigen::Index columns,
                           double (&out)[width][4]) {
  double sum[width][4] = {};
  for (Eigen::Index j = 0; j < columns; ++j) {
    const double* f = flux + j * stride;
    const double* w = weight + j * TemplateGrid::orders;
    for (int b = 0; b < width; ++b) {
      for (int k = 0; k < 4; ++k) sum[b][k] += w[b] * f[k];
    }
  }
  for (int b = 0; b < width; ++b) std::copy(sum[b], sum[b] + 4, out[b]);
}

/// Terms M_ab / (a! b!) of one power of Γ, into node-by-node storage.
template <int power>
void add_moments(const TemplateGrid& grid, Eigen::Index left, Eigen::Index columns, const double* weight,
                 std::size_t nodes, std::size_t stride, double* value) {
  constexpr int width = TemplateGrid::orders - power;
  constexpr double factorial[] = {1, 1, 2, 6, 24};
  const Eigen::MatrixXd& flux = grid.flux_times_gamma(power);
  double moment[width][4];
  for (std::size_t n = 0; n < nodes; n += 4) {
    moments_of_four_nodes<width>(flux.data() + left * flux.rows() + static_cast<Eigen::Index>(n), flux.rows(), weight,
                                 columns, moment);
    for (std::size_t b = 0; b < width; ++b) {
      const double scale = 1 / (factorial[power] * factorial[b]);
      const std::size_t term = first_of_degree(static_cast<std::size_t>(power) + b) + b;
      for (std::size_t k = 0; k < 4 && n + k < nodes; ++k) value[(n + k) * stride + term] = scale * moment[b][k];
    }
  }
}

/// Values of a spline in wavelength at one point.
double along(const CubicBasis::Weights& w, const Eigen::VectorXd& coefficients) {
  return Eigen::Map<const Eigen::Vector4d>(w.value.data()).dot(coefficients.segment<4>(w.first));
}

}  // namespace

BandFlux integrate_band(const SpectralTemplate& model, const BandWeights& band, double q, double s, double c) {
  const Eigen::VectorXd phi = model.phi_slice(q);
  const Eigen::VectorXd phi_slope = model.phi_slice(q, true);
  const Eigen::VectorXd gamma = model.gamma_slice(q);
  const Eigen::VectorXd gamma_slope = model.gamma_slice(q, true);
  BandFlux out;
  for (std::size_t j = 0; j < band.weight.size(); ++j) {
    const auto phi_basis = model.wavelength_basis.at(band.wavelength[j]);
    const auto gamma_basis = model.stretch_wavelength_basis.at(band.wavelength[j]);
    const double by_s = along(gamma_basis, gamma);
    const double by_c =
        -constants::ln_flux_per_mag * along(model.colour_basis.at(band.wavelength[j]), model.colour_law);
    const double f = band.weight[j] * std::exp(along(phi_basis, phi) + (s - 1) * by_s + c * by_c);
    out.flux += f;
    out.d_q += f * (along(phi_basis, phi_slope) + (s - 1) * along(gamma_basis, gamma_slope));
    out.d_s += f * by_s;
    out.d_c += f * by_c;
  }
  return out;
}

BandTable::BandTable(const SpectralTemplate& model, const BandWeights& band, double q_min, double q_max)
    : BandTable(TemplateGrid(model, {q_min, q_max, 2.5, band.step}), band) {}

BandTable::BandTable(const TemplateGrid& grid, const BandWeights& band)
    : nodes_(grid.nodes()), mean_wavelength_(band.mean_wavelength) {
  if (band.wavelength.empty() || std::abs(band.step - grid.wavelength_step()) > 1e-9) {
    throw std::invalid_argument("band weights and template grid differ in their wavelength steps");
  }
  // Weights times powers of K on the columns of the grid; what lies outside the grid joins its end columns.
  const long first = std::lround(band.wavelength.front() / band.step);
  const auto count = static_cast<long>(band.wavelength.size());
  const Eigen::Index left = grid.column(first);
  const Eigen::Index columns = grid.column(first + count - 1) - left + 1;
  Eigen::VectorXd weight = Eigen::VectorXd::Zero(columns);
  for (long j = 0; j < count; ++j) weight(grid.column(first + j) - left) += band.weight[static_cast<std::size_t>(j)];
  using Powers = Eigen::Matrix<double, Eigen::Dynamic, TemplateGrid::orders, Eigen::RowMajor>;
  const Powers weighted_colour = weight.asDiagonal() * grid.colour_powers().middleRows(left, columns);

  value_.assign(nodes_->size() * stride, 0.0);
  slope_.resize(nodes_->size() * stride);
  const double* powers = weighted_colour.data();
  add_moments<0>(grid, left, columns, powers, nodes_->size(), stride, value_.data());
  add_moments<1>(grid, left, columns, powers, nodes_->size(), stride, value_.data());
  add_moments<2>(grid, left, columns, powers, nodes_->size(), stride, value_.data());
  add_moments<3>(grid, left, columns, powers, nodes_->size(), stride, value_.data());
  add_moments<4>(grid, left, columns, powers, nodes_->size(), stride, value_.data());
  for (std::size_t n = 0; n < nodes_->size(); ++n) {
    double* node = value_.data() + n * stride;
    const double inverse = 1 / node[0];
    for (std::size_t t = 1; t < terms; ++t) node[t] *= inverse;
    logarithm_of_series(node);
    node[0] = std::log(node[0]);
  }
  nodes_->spline_slopes(value_.data(), slope_.data(), stride, stride);
}

StretchColour::StretchColour(double s, double c) {
  const double u = s - 1;
  const double v = c - TemplateGrid::centre_colour;
  const double u2 = u * u;
  const double v2 = v * v;
  monomial_ << 1, u, v, u2, u * v, v2, u2 * u, u2 * v, u * v2, v2 * v, u2 * u2, u2 * u * v, u2 * v2, u * v * v2,
      v2 * v2, 0;
  by_s_ << 0, 1, 0, 2 * u, v, 0, 3 * u2, 2 * u * v, v2, 0, 4 * u2 * u, 3 * u2 * v, 2 * u * v2, v2 * v, 0, 0;
  by_c_ << 0, 0, 1, 0, u, 2 * v, 0, u2, 2 * u * v, 3 * v2, 0, u2 * u, 2 * u2 * v, 3 * u * v2, 4 * v2 * v, 0;
}

BandFlux BandTable::at(double q, const StretchColour& where) const {
  const auto& phase = nodes_->phases();
  const std::size_t left = nodes_->interval(q);
  // Hermite basis on the interval and its slope; straight continuations outside the nodes.
  double h00 = 0, h10 = 0, h01 = 0, h11 = 0, d00 = 0, d10 = 0, d01 = 0, d11 = 0;
  if (q < phase.front()) {
    h00 = 1;
    h10 = q - phase.front();
    d10 = 1;
  } else if (q > phase.back()) {
    h01 = 1;
    h11 = q - phase.back();
    d11 = 1;
  } else {
    const double width = phase[left + 1] - phase[left];
    const double t = (q - phase[left]) / width;
    h00 = (1 + 2 * t) * (1 - t) * (1 - t);
    h10 = width * t * (1 - t) * (1 - t);
    h01 = t * t * (3 - 2 * t);
    h11 = width * t * t * (t - 1);
    d00 = 6 * t * (t - 1) / width;
    d10 = (1 - t) * (1 - 3 * t);
    d01 = -d00;
    d11 = t * (3 * t - 2);
  }
  using Node = Eigen::Map<const StretchColour::Terms>;
  const Node value_a(value_.data() + left * stride);
  const Node slope_a(slope_.data() + left * stride);
  const Node value_b(value_.data() + (left + 1) * stride);
  const Node slope_b(slope_.data() + (left + 1) * stride);
  const StretchColour::Terms value = h00 * value_a + h10 * slope_a + h01 * value_b + h11 * slope_b;
  const StretchColour::Terms by_q = d00 * value_a + d10 * slope_a + d01 * value_b + d11 * slope_b;
  BandFlux out;
  out.flux = std::exp((value * where.monomial_).sum());
  out.d_q = out.flux * (by_q * where.monomial_).sum();
  out.d_s = out.flux * (value * where.by_s_).sum();
  out.d_c = out.flux * (value * where.by_c_).sum();
  return out;
}

std::vector<double> BandTable::log_flux_at_nodes(double s, double c) const {
  const StretchColour where(s, c);
  std::vector<double> out(nodes_->size());
  for (std::size_t n = 0; n < out.size(); ++n) {
    out[n] = (Eigen::Map<const StretchColour::Terms>(value_.data() + n * stride) * where.monomial_).sum();
  }
  return out;
}

}  // namespace thirdrung
