#pragma once

#include <Eigen/Core>
#include <filesystem>
#include <string>
#include <vector>

namespace thirdrung {

/// Covariance of the distance moduli of the named hosts [mag^2], in their order.
///
/// The file is FITS with an image "covariance" (unit mag2) and a table "hosts" that names its rows in the column
/// "host"; or a table (ECSV) with a column "host" and one column a host, named after it, in mag2. Its hosts may stand
/// in any order, but must be those of the calibrators.
/// Throws InputError for a matrix that is of the wrong size, has a value that is not a number, is not symmetric (to
/// 1e-6 of the errors), or not positive definite, and for hosts that do not match; the message names the hosts.
Eigen::MatrixXd read_host_covariance(const std::filesystem::path& path, const std::vector<std::string>& hosts);

}  // namespace thirdrung
