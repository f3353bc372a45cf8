#pragma once

#include <Eigen/Core>

#include "template/cubic_basis.h"

namespace thirdrung {

/// Values of every basis function at every centre (CubicBasis::centres), a row a centre.
Eigen::MatrixXd collocation(const CubicBasis& basis);

/// Coefficients of the tensor-product spline that takes the given values at the centres.
/// @param value phases × wavelengths.
Eigen::MatrixXd interpolate(const CubicBasis& phase, const CubicBasis& wavelength, const Eigen::MatrixXd& value);

}  // namespace thirdrung
