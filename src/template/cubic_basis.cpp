#include "template/cubic_basis.h"

#include <algorithm>
#include <stdexcept>

namespace thirdrung {

namespace {
constexpr int degree = 3;
}

CubicBasis::CubicBasis(std::vector<double> breakpoints) : breakpoints_(std::move(breakpoints)) {
  if (breakpoints_.size() < 2) throw std::invalid_argument("a spline basis needs at least two breakpoints");
  if (std::adjacent_find(breakpoints_.begin(), breakpoints_.end(), std::greater_equal<>()) != breakpoints_.end()) {
    throw std::invalid_argument("the breakpoints of a spline basis must increase");
  }
  knots_.assign(degree, breakpoints_.front());
  knots_.insert(knots_.end(), breakpoints_.begin(), breakpoints_.end());
  knots_.insert(knots_.end(), degree, breakpoints_.back());
}

int CubicBasis::interval(double x) const {
  const auto above = std::upper_bound(breakpoints_.begin(), breakpoints_.end(), x);
  const auto index = static_cast<int>(above - breakpoints_.begin()) - 1;
  return std::clamp(index, 0, static_cast<int>(breakpoints_.size()) - 2);
}

CubicBasis::Weights CubicBasis::at(double x) const {
  x = std::clamp(x, front(), back());
  const int first = interval(x);
  // The knots t[first + 3] and t[first + 4] enclose x (de Boor's recurrence, unrolled over the degree).
  const double* t = knots_.data() + first + degree;
  Weights out;
  out.first = first;
  double left[degree + 1];
  double right[degree + 1];
  out.value[0] = 1.0;
  for (int j = 1; j <= degree; ++j) {
    left[j] = x - t[1 - j];
    right[j] = t[j] - x;
    double saved = 0.0;
    for (int r = 0; r < j; ++r) {
      const double term = out.value[static_cast<std::size_t>(r)] / (right[r + 1] + left[j - r]);
      out.value[static_cast<std::size_t>(r)] = saved + right[r + 1] * term;
      saved = left[j - r] * term;
    }
    out.value[static_cast<std::size_t>(j)] = saved;
  }
  return out;
}

CubicBasis::Weights CubicBasis::slope_at(double x) const {
  Weights out;
  const bool outside = x < front() || x > back();
  x = std::clamp(x, front(), back());
  const int first = interval(x);
  out.first = first;
  if (outside) return out;
  const double* t = knots_.data() + first + degree;
  // Values of the three quadratic B-splines that do not vanish here.
  double quadratic[degree];
  double left[degree];
  double right[degree];
  quadratic[0] = 1.0;
  for (int j = 1; j < degree; ++j) {
    left[j] = x - t[1 - j];
    right[j] = t[j] - x;
    double saved = 0.0;
    for (int r = 0; r < j; ++r) {
      const double term = quadratic[r] / (right[r + 1] + left[j - r]);
      quadratic[r] = saved + right[r + 1] * term;
      saved = left[j - r] * term;
    }
    quadratic[j] = saved;
  }
  for (int r = 0; r <= degree; ++r) {
    // B'_r = 3 [ N_{r-1} / (t_{r+3} - t_r) - N_r / (t_{r+4} - t_{r+1}) ], knots counted from the interval's own.
    const double rising = r > 0 ? quadratic[r - 1] / (t[r] - t[r - 3]) : 0.0;
    const double falling = r < degree ? quadratic[r] / (t[r + 1] - t[r - 2]) : 0.0;
    out.value[static_cast<std::size_t>(r)] = degree * (rising - falling);
  }
  return out;
}

std::vector<double> CubicBasis::centres() const {
  std::vector<double> out(static_cast<std::size_t>(size()));
  for (std::size_t i = 0; i < out.size(); ++i) out[i] = (knots_[i + 1] + knots_[i + 2] + knots_[i + 3]) / 3.0;
  return out;
}

}  // namespace thirdrung
