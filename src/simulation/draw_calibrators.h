#pragma once

#include <Eigen/Core>
#include <string>
#include <vector>

#include "simulation/draw_supernova.h"
#include "simulation/simulation_options.h"

namespace thirdrung {

/// A nearby galaxy with one calibrator or two, and what a ladder below measured of its distance.
struct SimulatedHost {
  std::string name;
  std::size_t survey = 0;         ///< Who observes its supernovae, among the surveys of the options.
  SupernovaTruth place;           ///< Position, redshifts, dust and mass; the rest belongs to no supernova.
  double true_modulus = 0.0;      ///< [mag].
  double measured_modulus = 0.0;  ///< With its error, and the error common to all hosts [mag].
};

/// The hosts of SimulationOptions::calibrators, in order.
std::vector<SimulatedHost> draw_hosts(const SimulationOptions& options);
/// Covariance of their measured moduli [mag^2].
Eigen::MatrixXd host_covariance(const SimulationOptions& options);
/// Host of each calibrator, by number: the first hosts have two.
std::vector<std::size_t> hosts_of_calibrators(const SimulatedCalibrators& calibrators);

/// The supernova, with its stretch, colour, date and intrinsic scatter, in that host.
SupernovaTruth in_host(const SimulationOptions& options, const SimulatedHost& host, const SupernovaTruth& supernova);

}  // namespace thirdrung
