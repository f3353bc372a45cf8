#pragma once

namespace thirdrung {

/// How the host-mass step is applied.
struct HostMassOptions {
  double step = 10.0;  ///< log10 of the mass of the step [solar masses] (Kelly et al. 2010; Sullivan et al. 2010).
  /// Error of log10 mass where a mass comes without one [dex]: stellar masses from broad-band photometry are good to
  /// about this (Taylor et al. 2011, MNRAS 418, 1587, give 0.1 for their own; 0.2 allows for mixed sources).
  double default_error = 0.2;
  /// Floor of the error [dex]: tabulated errors of a few thousandths are formal, without the spread between mass
  /// models.
  double smallest_error = 0.01;
  double probability_when_absent = 0.5;  ///< P for a supernova without a mass: it then gets no host term at all.
  double mass_offset = 0.0;              ///< Added to every log10 mass [dex]; a systematic of the mass scale.
};

/// P(log M > step) for a Gaussian error of log M: 1/2 erfc((step - log M) / (sqrt 2 error)).
///
/// A mass that is NaN gives probability_when_absent; an error that is NaN or not positive gives default_error.
double host_mass_probability(double host_log_mass, double host_log_mass_error, const HostMassOptions& options = {});

}  // namespace thirdrung
