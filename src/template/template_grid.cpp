#include "template/template_grid.h"

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "base/constants.h"

namespace thirdrung {

namespace {

/// The breakpoints of Φ inside the range, its ends, and equal parts of every gap wider than `widest`.
/// The first and last gaps are always halved: "not-a-knot" ends then reproduce a cubic there.
std::vector<double> phase_nodes(const SpectralTemplate& model, double q_min, double q_max, double widest) {
  std::vector<double> stops = {q_min, q_max};
  for (const double b : model.phase_basis.breakpoints()) {
    if (b > q_min && b < q_max) stops.push_back(b);
  }
  std::sort(stops.begin(), stops.end());
  constexpr double same = 1e-6;
  stops.erase(std::unique(stops.begin(), stops.end(), [](double a, double b) { return b - a < same; }), stops.end());
  std::vector<double> out;
  for (std::size_t i = 0; i + 1 < stops.size(); ++i) {
    const bool at_end = i == 0 || i + 2 == stops.size();
    const double gap = stops[i + 1] - stops[i];
    const int parts = std::max(at_end ? 2 : 1, static_cast<int>(std::ceil(gap / widest - 1e-9)));
    for (int k = 0; k < parts; ++k) out.push_back(stops[i] + gap * k / parts);
  }
  out.push_back(stops.back());
  return out;
}

/// Values of a spline in wavelength, from its coefficients and the basis at the points.
Eigen::VectorXd along(const Eigen::VectorXd& coefficients, const std::vector<CubicBasis::Weights>& weights) {
  Eigen::VectorXd out(static_cast<Eigen::Index>(weights.size()));
  for (std::size_t j = 0; j < weights.size(); ++j) {
    out(static_cast<Eigen::Index>(j)) =
        Eigen::Map<const Eigen::Vector4d>(weights[j].value.data()).dot(coefficients.segment<4>(weights[j].first));
  }
  return out;
}

std::vector<CubicBasis::Weights> basis_at(const CubicBasis& basis, const std::vector<double>& wavelength) {
  std::vector<CubicBasis::Weights> out;
  out.reserve(wavelength.size());
  for (const double lambda : wavelength) out.push_back(basis.at(lambda));
  return out;
}

}  // namespace

TemplateGrid::TemplateGrid(SpectralTemplate model, const TemplateGridOptions& options)
    : model_(std::move(model)), step_(options.wavelength_step) {
  const double q_min = std::max(options.phase_min, model_.phase_basis.front());
  const double q_max = std::min(options.phase_max, model_.phase_basis.back());
  if (!(q_max > q_min)) throw std::invalid_argument("a template grid needs a range of phases");
  nodes_ = std::make_shared<const PhaseNodes>(phase_nodes(model_, q_min, q_max, options.phase_step));

  // One step beyond every basis: from there on the template is constant, and column() holds the last one.
  double blue = model_.wavelength_basis.front();
  double red = model_.wavelength_basis.back();
  for (const CubicBasis* basis : {&model_.stretch_wavelength_basis, &model_.colour_basis}) {
    blue = std::min(blue, basis->front());
    red = std::max(red, basis->back());
  }
  first_multiple_ = static_cast<long>(std::floor(blue / step_)) - 1;
  const long last_multiple = static_cast<long>(std::ceil(red / step_)) + 1;
  std::vector<double> wavelength;
  for (long m = first_multiple_; m <= last_multiple; ++m) wavelength.push_back(static_cast<double>(m) * step_);

  const auto phi_basis = basis_at(model_.wavelength_basis, wavelength);
  const auto gamma_basis = basis_at(model_.stretch_wavelength_basis, wavelength);
  const auto rows = static_cast<Eigen::Index>(nodes_->size());
  const auto columns = static_cast<Eigen::Index>(wavelength.size());
  const Eigen::Index filled_rows = (rows + row_block - 1) / row_block * row_block;
  for (auto& matrix : flux_times_gamma_) matrix.setZero(filled_rows, columns);
  for (Eigen::Index n = 0; n < rows; ++n) {
    const double q = nodes_->phases()[static_cast<std::size_t>(n)];
    const Eigen::VectorXd gamma = along(model_.gamma_slice(q), gamma_basis);
    Eigen::VectorXd product = along(model_.phi_slice(q), phi_basis).array().exp();
    for (auto& matrix : flux_times_gamma_) {
      matrix.row(n) = product.transpose();
      product.array() *= gamma.array();
    }
  }
  const Eigen::VectorXd k =
      -constants::ln_flux_per_mag * along(model_.colour_law, basis_at(model_.colour_basis, wavelength));
  colour_powers_.resize(columns, orders);
  colour_powers_.col(0) = (centre_colour * k.array()).exp();
  for (Eigen::Index b = 1; b < orders; ++b) colour_powers_.col(b) = colour_powers_.col(b - 1).cwiseProduct(k);
}

Eigen::Index TemplateGrid::column(long multiple) const {
  return std::clamp<Eigen::Index>(static_cast<Eigen::Index>(multiple - first_multiple_), 0, colour_powers_.rows() - 1);
}

}  // namespace thirdrung
