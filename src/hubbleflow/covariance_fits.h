#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "hubbleflow/covariance_model.h"
#include "tables/fits_image.h"

namespace thirdrung {

/// Adds a matrix as an image, row by row.
void add_matrix(FitsWriter& writer, const std::string& name, const Eigen::MatrixXd& matrix, const std::string& unit,
                const std::string& comment);

/// A table of one column.
Table names_table(const std::string& column, const std::vector<std::string>& names);

/// Adds what a covariance is made of: "diagonals" (parts that do not correlate, one row each, named by the table
/// "diagonal_parts"), "part1" and so on for those that do (named by "matrix_parts"), and "shifts", one row a systematic
/// (named by "systematics").
void add_covariance_parts(FitsWriter& writer, const CovarianceModel& model);

}  // namespace thirdrung
