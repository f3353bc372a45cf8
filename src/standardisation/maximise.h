#pragma once

#include <Eigen/Core>
#include <vector>

#include "standardisation/hierarchical.h"

namespace thirdrung {

/// The parameters that are free, as places in the vector that PopulationLayout describes.
struct FreeParameters {
  std::vector<Eigen::Index> places;
  Eigen::VectorXd pick(const Eigen::VectorXd& full) const { return full(places); }
  Eigen::MatrixXd pick(const Eigen::MatrixXd& full) const { return full(places, places); }
};

/// Quasi-Newton search (Ceres, BFGS) for the smallest -2 ln L from `start`, in coordinates that make the expected
/// curvature there the unit matrix. Returns the full parameter vector.
Eigen::VectorXd search_maximum(const PopulationData& data, const FreeParameters& free, const Eigen::VectorXd& start,
                               int most_iterations);

/// Newton steps on the exact Hessian, halved where they do not lower -2 ln L. False if the Hessian is not positive
/// definite or the steps do not die out.
/// @param hessian of the free parameters at the last point.
bool polish_maximum(const PopulationData& data, const FreeParameters& free, Eigen::VectorXd& parameters,
                    Eigen::MatrixXd& hessian);

/// One Newton step of the restricted likelihood in the widths (HierarchicalOptions::restricted_widths), then the others
/// at their maximum again. False if that does not converge.
bool correct_widths(const PopulationData& data, const FreeParameters& free, const Eigen::MatrixXd& hessian,
                    Eigen::VectorXd& parameters);

}  // namespace thirdrung
