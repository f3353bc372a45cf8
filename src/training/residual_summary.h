#pragma once

#include <functional>
#include <map>
#include <span>
#include <string>
#include <vector>

#include "training/run_training.h"

namespace thirdrung {

/// One epoch of a training supernova as fitted by a template that has not seen it.
struct HeldOutPoint {
  std::size_t supernova = 0;  ///< Counts supernovae; epochs of one go together in errors.
  std::string survey, passband;
  double phase = 0;            ///< Rest frame [d].
  double rest_wavelength = 0;  ///< Mean of the band over 1 + z [angstrom].
  double z = 0;
  double pull = 0;       ///< (data − template) over all errors in quadrature.
  double magnitude = 0;  ///< Data − template, to first order: −1.086 (f_data − f)/f [mag].
  double weight = 0;     ///< Of `magnitude` [mag^-2].
  double freedom = 1;    ///< Expected square of the pull, FittedEpoch::freedom.
};

/// What the held-out points of one bin say.
struct ResidualBin {
  std::string name;
  double centre = 0;  ///< Mean of what is binned, where it is a number.
  int points = 0, supernovae = 0;
  double mean_pull = 0, mean_pull_error = 0;
  double offset = 0, offset_error = 0;  ///< Weighted mean of HeldOutPoint::magnitude [mag].
  double chi2_per_dof = 0, chi2_per_dof_error = 0;
  double width = 0;  ///< Half the range that holds the middle 68.3% of the pulls: blind to wild epochs.
};

/// The trusted out-of-fold fits of training supernovae; fits of four points or fewer are left out.
/// @param light_curves those that were fitted, in any order.
std::vector<HeldOutPoint> held_out_points(const TrainingResult& result, std::span<const LightCurve> light_curves);

/// Statistics of one bin. Errors treat all epochs of a supernova as one draw (sums over supernovae, the sandwich form
/// of Liang & Zeger 1986, Biometrika 73, 13), because its fit and its colour scatter are common to them.
ResidualBin summarise(const std::string& name, std::span<const HeldOutPoint* const> points);

/// Bins in order of name (by a text) or of value (by a number between the edges, empty bins left out).
std::vector<ResidualBin> bins_by(std::span<const HeldOutPoint> points,
                                 const std::function<std::string(const HeldOutPoint&)>& key);
std::vector<ResidualBin> bins_by(std::span<const HeldOutPoint> points,
                                 const std::function<double(const HeldOutPoint&)>& value, std::span<const double> edges,
                                 const std::string& unit);

/// Slope of the offsets of bins along their centres, with error [mag per unit].
struct Slope {
  double value = 0, error = 0;
};
Slope slope_of(std::span<const ResidualBin> bins);

/// One sentence naming every bin whose offset is beyond `sigma` of its error, or one that says there is none.
std::string offset_sentence(std::span<const ResidualBin> bins, const std::string& along, double sigma = 3);

}  // namespace thirdrung
