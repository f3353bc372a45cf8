#include "template/interpolation.h"

#include <Eigen/LU>

namespace thirdrung {

Eigen::MatrixXd collocation(const CubicBasis& basis) {
  const auto centre = basis.centres();
  Eigen::MatrixXd out = Eigen::MatrixXd::Zero(basis.size(), basis.size());
  for (int i = 0; i < basis.size(); ++i) {
    const auto w = basis.at(centre[static_cast<std::size_t>(i)]);
    for (int k = 0; k < 4; ++k) out(i, w.first + k) = w.value[static_cast<std::size_t>(k)];
  }
  return out;
}

Eigen::MatrixXd interpolate(const CubicBasis& phase, const CubicBasis& wavelength, const Eigen::MatrixXd& value) {
  const Eigen::MatrixXd in_phase = collocation(phase).partialPivLu().solve(value);
  return collocation(wavelength).partialPivLu().solve(in_phase.transpose()).transpose();
}

}  // namespace thirdrung
