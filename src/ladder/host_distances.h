#pragma once

#include <Eigen/Core>
#include <filesystem>
#include <string>
#include <vector>

#include "tables/table.h"

namespace thirdrung {

/// Distance moduli of the hosts of calibrators, with the covariance of their errors.
struct HostDistances {
  std::vector<std::string> hosts;  ///< Names, in the order of vector and matrix.
  Eigen::VectorXd modulus;         ///< [mag].
  Eigen::MatrixXd covariance;      ///< [mag^2].
};

/// A calibrator: a supernova in a host of known distance.
struct Calibrator {
  std::string supernova;
  std::string host;
  Place place;  ///< Row it was read from, for messages.
};

/// Calibrators and the distances of their hosts. Two supernovae of one host share its modulus, error and all.
struct CalibratorList {
  std::vector<Calibrator> calibrators;  ///< In the order of the table.
  HostDistances distances;              ///< Hosts in order of first appearance.

  /// Place of a calibrator's host among the distances.
  Eigen::Index host_of(std::size_t calibrator) const;
};

/// Reads a table of calibrators (docs/formats.md): supernova, host (its own name where absent or empty),
/// distance_modulus and, unless a covariance is given, distance_modulus_error (mag).
///
/// @param covariance file with the covariance of the moduli, empty for independent errors; read_host_covariance().
/// Throws InputError naming file, row and column for: no rows; a supernova without a name, or named twice; a modulus
/// that is missing or outside 15 to 45 mag; an error that is missing or not positive; rows of one host with different
/// moduli or errors; an error that contradicts the covariance; and as read_host_covariance().
CalibratorList read_calibrators(const Table& table, const std::filesystem::path& covariance = {});

/// The list of the calibrators that `keep` is true for, and their hosts alone. (Leaving a host out is the same as
/// leaving its modulus free.)
CalibratorList some_of(const CalibratorList& list, const std::vector<bool>& keep);

}  // namespace thirdrung
