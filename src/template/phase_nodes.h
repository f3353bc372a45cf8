#pragma once

#include <vector>

namespace thirdrung {

/// Phases at which band tables are stored, with the twice differentiable cubic spline through values at them.
///
/// Spline equations with "not-a-knot" ends: de Boor 1978, "A Practical Guide to Splines", ch. IV, eqs. (5)-(8).
class PhaseNodes {
 public:
  PhaseNodes() = default;
  /// @param phases at least four, increasing [d]; throws std::invalid_argument otherwise.
  explicit PhaseNodes(std::vector<double> phases);

  const std::vector<double>& phases() const { return phases_; }
  std::size_t size() const { return phases_.size(); }

  /// Index i of the interval [phase i, phase i+1] that holds q; the first or last interval outside the nodes.
  std::size_t interval(double q) const {
    const double place = (q - phases_.front()) * cells_per_day_;
    if (!(place > 0)) return 0;
    if (place >= last_cell_) return phases_.size() - 2;
    std::size_t i = interval_of_cell_[static_cast<std::size_t>(place)];
    while (q > phases_[i + 1]) ++i;
    return i;
  }

  /// Slopes at the nodes of the splines through `count` interleaved functions: function t has value[n * stride + t] at
  /// node n, and its slope is written to slope[n * stride + t].
  void spline_slopes(const double* value, double* slope, std::size_t count, std::size_t stride) const;

 private:
  std::vector<double> phases_;
  std::vector<std::size_t> interval_of_cell_;
  double cells_per_day_ = 0;
  double last_cell_ = 0;
  std::vector<double> width_;  ///< Between the nodes [d].
  std::vector<double> lower_;  ///< Elimination factors of the tridiagonal system.
  std::vector<double> pivot_inverse_;
  std::vector<double> upper_;
};

}  // namespace thirdrung
