#pragma once

#include <array>
#include <vector>

namespace thirdrung {

/// Basis of cubic B-splines on given breakpoints (de Boor 1978, "A Practical Guide to Splines", ch. X).
///
/// With n breakpoints there are n + 2 basis functions; the end knots are repeated, so that the first and
/// last coefficients are the spline's end values. Arguments outside the breakpoints are held at the ends.
class CubicBasis {
 public:
  struct Weights {
    int first = 0;                  ///< Index of the first of the four basis functions that do not vanish.
    std::array<double, 4> value{};  ///< Their values.
  };

  CubicBasis() = default;
  /// Throws std::invalid_argument unless there are at least two, increasing breakpoints.
  explicit CubicBasis(std::vector<double> breakpoints);

  int size() const { return static_cast<int>(breakpoints_.size()) + 2; }
  const std::vector<double>& breakpoints() const { return breakpoints_; }
  double front() const { return breakpoints_.front(); }
  double back() const { return breakpoints_.back(); }

  Weights at(double x) const;
  /// Weights of the first derivative; zero outside the breakpoints.
  Weights slope_at(double x) const;
  /// Mean abscissa of each basis function's knots (its "centre", the Greville point).
  std::vector<double> centres() const;

 private:
  int interval(double x) const;

  std::vector<double> breakpoints_;
  std::vector<double> knots_;
};

}  // namespace thirdrung
