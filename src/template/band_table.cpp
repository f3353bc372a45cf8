#include "template/band_table.h"

#include <cmath>
#include <stdexcept>

#include "base/constants.h"

namespace thirdrung {

namespace {

using Terms = Eigen::Array<double, 16, 1>;

/// Place of the first monomial of total degree n; u^(n−b) v^b stands b places further.
constexpr std::size_t first_of_degree(std::size_t n) {
  return n * (n + 1) / 2;
}

/// 1, u, v, u², uv, v², ... to total degree 4, and a zero.
Terms monomials(double u, double v) {
  const double u2 = u * u;
  const double v2 = v * v;
  Terms m;
  m << 1, u, v, u2, u * v, v2, u2 * u, u2 * v, u * v2, v2 * v, u2 * u2, u2 * u * v, u2 * v2, u * v * v2, v2 * v2, 0;
  return m;
}

Terms monomials_by_u(double u, double v) {
  const double u2 = u * u;
  const double v2 = v * v;
  Terms m;
  m << 0, 1, 0, 2 * u, v, 0, 3 * u2, 2 * u * v, v2, 0, 4 * u2 * u, 3 * u2 * v, 2 * u * v2, v2 * v, 0, 0;
  return m;
}

Terms monomials_by_v(double u, double v) {
  const double u2 = u * u;
  const double v2 = v * v;
  Terms m;
  m << 0, 0, 1, 0, u, 2 * v, 0, u2, 2 * u * v, 3 * v2, 0, u2 * u, 2 * u2 * v, 3 * u * v2, 4 * v2 * v, 0;
  return m;
}

/// Series of ln(1 + R) from the series R without its constant term, in place, to total degree 4.
///
/// With the parts of total degree n (Euler's theorem on homogeneous functions, as in Knuth, "The Art of Computer
/// Programming", vol. 2, 4.7, for one variable): n L_n = n R_n − Σ_{k=1}^{n−1} k L_k R_{n−k}.
void logarithm_of_series(double* r) {
  double l[15];
  for (std::size_t n = 1; n <= 4; ++n) {
    for (std::size_t b = 0; b <= n; ++b) {
      double sum = static_cast<double>(n) * r[first_of_degree(n) + b];
      for (std::size_t k = 1; k < n; ++k) {
        double product = 0;
        const std::size_t low = b > n - k ? b - (n - k) : 0;
        for (std::size_t i = low; i <= std::min(k, b); ++i) {
          product += l[first_of_degree(k) + i] * r[first_of_degree(n - k) + b - i];
        }
        sum -= static_cast<double>(k) * product;
      }
      l[first_of_degree(n) + b] = sum / static_cast<double>(n);
    }
  }
  for (std::size_t t = 1; t < 15; ++t) r[t] = l[t];
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
    : BandTable(TemplateGrid(model, {q_min, q_max, 2.0, band.step}), band) {}

BandTable::BandTable(const TemplateGrid& grid, const BandWeights& band)
    : nodes_(grid.nodes()), mean_wavelength_(band.mean_wavelength) {
  if (band.wavelength.empty() || std::abs(band.step - grid.wavelength_step()) > 1e-9) {
    throw std::invalid_argument("band weights and template grid differ in their wavelength steps");
  }
  constexpr int orders = TemplateGrid::orders;
  // Weights times powers of K on the columns of the grid; what lies outside the grid joins its end columns.
  const long first = std::lround(band.wavelength.front() / band.step);
  const auto count = static_cast<long>(band.wavelength.size());
  const Eigen::Index left = grid.column(first);
  const Eigen::Index columns = grid.column(first + count - 1) - left + 1;
  Eigen::VectorXd weight = Eigen::VectorXd::Zero(columns);
  for (long j = 0; j < count; ++j) weight(grid.column(first + j) - left) += band.weight[static_cast<std::size_t>(j)];
  const Eigen::MatrixXd weighted_colour =
      (grid.colour_powers().middleRows(left, columns).array().colwise() * weight.array()).matrix();

  const auto rows = static_cast<Eigen::Index>(nodes_->size());
  value_.assign(nodes_->size() * stride, 0.0);
  slope_.assign(nodes_->size() * stride, 0.0);
  constexpr double factorial[] = {1, 1, 2, 6, 24};
  Eigen::MatrixXd moment;
  for (int a = 0; a < orders; ++a) {
    moment.noalias() =
        grid.flux_times_gamma(a).middleCols(left, columns).lazyProduct(weighted_colour.leftCols(orders - a));
    for (int b = 0; b < orders - a; ++b) {
      const auto term = first_of_degree(static_cast<std::size_t>(a + b)) + static_cast<std::size_t>(b);
      const double scale = 1 / (factorial[a] * factorial[b]);
      for (Eigen::Index n = 0; n < rows; ++n)
        value_[static_cast<std::size_t>(n) * stride + term] = scale * moment(n, b);
    }
  }
  for (std::size_t n = 0; n < nodes_->size(); ++n) {
    double* node = value_.data() + n * stride;
    const double inverse = 1 / node[0];
    for (std::size_t t = 1; t < terms; ++t) node[t] *= inverse;
    logarithm_of_series(node);
    node[0] = std::log(node[0]);
  }
  nodes_->spline_slopes(value_.data(), slope_.data(), stride, stride);
}

BandFlux BandTable::at(double q, double s, double c) const {
  const auto& phase = nodes_->phases();
  const std::size_t left = nodes_->interval(q);
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
  using Node = Eigen::Map<const Terms>;
  const Node value_a(value_.data() + left * stride);
  const Node slope_a(slope_.data() + left * stride);
  const Node value_b(value_.data() + (left + 1) * stride);
  const Node slope_b(slope_.data() + (left + 1) * stride);
  const double u = s - 1;
  const double v = c - TemplateGrid::centre_colour;
  const Terms m = monomials(u, v);
  const Terms value = h00 * value_a + h10 * slope_a + h01 * value_b + h11 * slope_b;
  const Terms by_q = d00 * value_a + d10 * slope_a + d01 * value_b + d11 * slope_b;
  BandFlux out;
  out.flux = std::exp((value * m).sum());
  out.d_q = out.flux * (by_q * m).sum();
  out.d_s = out.flux * (value * monomials_by_u(u, v)).sum();
  out.d_c = out.flux * (value * monomials_by_v(u, v)).sum();
  return out;
}

std::vector<double> BandTable::log_flux_at_nodes(double s, double c) const {
  const Terms m = monomials(s - 1, c - TemplateGrid::centre_colour);
  std::vector<double> out(nodes_->size());
  for (std::size_t n = 0; n < out.size(); ++n) {
    out[n] = (Eigen::Map<const Terms>(value_.data() + n * stride) * m).sum();
  }
  return out;
}

}  // namespace thirdrung
