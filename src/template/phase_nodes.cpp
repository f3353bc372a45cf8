#include "template/phase_nodes.h"

#include <algorithm>
#include <cmath>
#include <functional>
#include <stdexcept>

namespace thirdrung {

PhaseNodes::PhaseNodes(std::vector<double> phases) : phases_(std::move(phases)) {
  const std::size_t n = phases_.size();
  if (n < 4) throw std::invalid_argument("a table in phase needs at least four nodes");
  if (std::adjacent_find(phases_.begin(), phases_.end(), std::greater_equal<>()) != phases_.end()) {
    throw std::invalid_argument("the nodes of a table in phase must increase");
  }
  width_.resize(n - 1);
  for (std::size_t i = 0; i + 1 < n; ++i) width_[i] = phases_[i + 1] - phases_[i];

  const double span = phases_.back() - phases_.front();
  const auto cells = static_cast<std::size_t>(std::ceil(2 * span));
  cells_per_day_ = static_cast<double>(cells) / span;
  last_cell_ = static_cast<double>(cells);
  std::size_t i = 0;
  for (std::size_t cell = 0; cell < cells; ++cell) {
    const double start = phases_.front() + static_cast<double>(cell) / cells_per_day_;
    while (i + 2 < n && phases_[i + 1] <= start) ++i;
    interval_of_cell_.push_back(i);
  }

  // Rows of the system: interior (continuous second derivative), and at the ends a continuous third derivative.
  std::vector<double> below(n);
  std::vector<double> diagonal(n);
  upper_.resize(n);
  diagonal[0] = width_[1];
  upper_[0] = width_[0] + width_[1];
  for (std::size_t k = 1; k + 1 < n; ++k) {
    below[k] = width_[k];
    diagonal[k] = 2 * (width_[k - 1] + width_[k]);
    upper_[k] = width_[k - 1];
  }
  below[n - 1] = width_[n - 2] + width_[n - 3];
  diagonal[n - 1] = width_[n - 3];
  lower_.resize(n);
  pivot_inverse_.resize(n);
  pivot_inverse_[0] = 1 / diagonal[0];
  for (std::size_t k = 1; k < n; ++k) {
    lower_[k] = below[k] * pivot_inverse_[k - 1];
    pivot_inverse_[k] = 1 / (diagonal[k] - lower_[k] * upper_[k - 1]);
  }
}

void PhaseNodes::spline_slopes(const double* value, double* slope, std::size_t count, std::size_t stride) const {
  const std::size_t n = phases_.size();
  // Right-hand sides a × (chord before the node) + b × (chord after it), eliminated downwards as they are made.
  for (std::size_t k = 0; k < n; ++k) {
    const std::size_t before = k == 0 ? 0 : (k + 1 == n ? n - 3 : k - 1);
    double a = 0;
    double b = 0;
    const double w0 = width_[before];
    const double w1 = width_[before + 1];
    if (k == 0) {
      a = (w0 + 2 * (w0 + w1)) * w1 / (w0 + w1);
      b = w0 * w0 / (w0 + w1);
    } else if (k + 1 == n) {
      a = w1 * w1 / (w0 + w1);
      b = (w1 + 2 * (w0 + w1)) * w0 / (w0 + w1);
    } else {
      a = 3 * w1;
      b = 3 * w0;
    }
    a /= w0;
    b /= w1;
    const double* v = value + before * stride;
    double* out = slope + k * stride;
    for (std::size_t t = 0; t < count; ++t) {
      out[t] = a * (v[stride + t] - v[t]) + b * (v[2 * stride + t] - v[stride + t]);
    }
    if (k > 0) {
      for (std::size_t t = 0; t < count; ++t) out[t] -= lower_[k] * slope[(k - 1) * stride + t];
    }
  }
  for (std::size_t k = n; k-- > 0;) {
    double* out = slope + k * stride;
    if (k + 1 < n) {
      for (std::size_t t = 0; t < count; ++t) out[t] -= upper_[k] * out[stride + t];
    }
    for (std::size_t t = 0; t < count; ++t) out[t] *= pivot_inverse_[k];
  }
}

}  // namespace thirdrung
