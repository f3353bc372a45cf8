#pragma once

#include <Eigen/Core>
#include <functional>
#include <map>
#include <span>
#include <string>
#include <vector>

#include "standardisation/standardisation.h"

namespace thirdrung {

/// How faint a survey finds supernovae: with the probability Phi((m_b - m) / width) at the peak magnitude m.
struct MagnitudeLimit {
  double m_b = 0.0;    ///< Peak B magnitude, in the rest frame, at which half are found [mag].
  double width = 0.0;  ///< Over which the chance falls [mag]; 0: a sharp limit.
};

/// Limits by survey. A survey without one finds everything.
using MagnitudeLimits = std::map<std::string, MagnitudeLimit>;

/// Mean departure from the relation of a supernova that was found; negative, for the found ones are bright [mag].
///
/// With departures i ~ N(0, scatter), found if i + N(0, blur) < margin: -scatter / sqrt(scatter + blur) phi(t) /
/// Phi(t), t = margin / sqrt(scatter + blur): the mean of a truncated normal, in the form of Heckman 1979 (Econometrica
/// 47, 153). At a given redshift this is the Malmquist bias of the second kind (Teerikorpi 1997, ARA&A 35, 101).
/// @param scatter variance of the departures themselves [mag^2].
/// @param blur variance that stands between the magnitude expected and the limit, but not in the departure [mag^2].
/// @param margin magnitude of the limit minus that expected.
double selection_bias(double scatter, double blur, double margin);

/// How much smaller the variance of the found ones is than `scatter`: scatter^2 / (scatter + blur) h (h + t), h =
/// phi(t) / Phi(t), the rest as above [mag^2].
double selection_variance_loss(double scatter, double blur, double margin);

/// The bias of each supernova [mag]; 0 where no limit holds.
///
/// Departures are the intrinsic scatter and the scatter of the modulus (sigma_int^2 + lost_variance +
/// gamma^2 P (1 - P) + flow_variance). The magnitude expected is that of the relation for the observed s, c, host and
/// redshift; the blur, the limit's width and the errors of s and c. Given its s and c, a supernova's chance depends on
/// nothing else, so what the population looks like, or how selection bends it, does not enter. The errors of the
/// light-curve fit are taken not to be known to the search. Of several surveys the faintest limit holds; none, if one
/// has none.
Eigen::VectorXd selection_biases(std::span<const StandardisationDatum> data,
                                 const StandardisationCoefficients& coefficients, const HostMassOptions& host_mass,
                                 const MagnitudeLimits& limits);

/// standardise() with the bias taken off each magnitude.
std::vector<StandardisedMagnitude> standardise_selected(std::span<const StandardisationDatum> data,
                                                        const StandardisationCoefficients& coefficients,
                                                        const HostMassOptions& host_mass,
                                                        const MagnitudeLimits& limits);

using StandardisationFit = std::function<StandardisationResult(std::span<const StandardisationDatum>)>;

/// A fit to data with the bias taken off: the coefficients give the bias, and the bias the coefficients, until no
/// magnitude moves by more than 1e-7. sigma_int is that of the supernovae found; what they lack on average of the
/// variance before selection, weighted as they weigh in sigma_int, goes into lost_variance. A remark says if supernovae
/// are fainter than the limits allow. Throws NoResultError if that does not settle.
StandardisationResult fit_selected(std::span<const StandardisationDatum> data, const HostMassOptions& host_mass,
                                   const MagnitudeLimits& limits, const StandardisationFit& fit);

}  // namespace thirdrung
