#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "light/dust_law.h"
#include "sky/expansion.h"
#include "sky/position.h"
#include "sky/sun_motion.h"

namespace thirdrung {

/// How bright supernovae truly are and how the smooth universe expands.
///
/// m_B = M_B + 5 log10(d_L/Mpc) + 25 − α (s − 1) + β c − γ (step − ½) + N(0, σ_int), step 1 above the host mass of the
/// step and 0 below.
struct SimulatedRelation {
  double h0 = 70.0;  ///< [km/s/Mpc].
  double absolute_magnitude =
      -19.25;           ///< M_B of a supernova of s = 1, c = 0 in the mean of light and massive hosts [mag].
  Expansion expansion;  ///< q0 and j0.
  double alpha = 1.3;   ///< [mag].
  double beta = 3.0;
  double gamma = 0.05;      ///< [mag]; positive: supernovae in massive hosts are brighter.
  double mass_step = 10.0;  ///< log10 of the mass [solar masses].
  double sigma_int = 0.09;  ///< [mag], the same at all wavelengths.

  /// log10 H0 − 0.2 M_B − 5: the intercept that an analysis should recover.
  double a_b() const;
};

/// What supernovae there are.
struct SimulatedPopulation {
  double s_peak = 1.0;          ///< Most frequent stretch.
  double s_width_below = 0.12;  ///< Width of the half-Gaussian below it,
  double s_width_above = 0.07;  ///< and above.
  double s_min = 0.65, s_max = 1.3;
  double c_mean = -0.05;    ///< Of the Gaussian part [mag].
  double c_width = 0.05;    ///< [mag].
  double c_tail = 0.06;     ///< Mean of the exponential reddening added to it [mag]; 0: none.
  double c_max = 0.6;       ///< [mag].
  double mass_mean = 10.2;  ///< log10 of the host mass [solar masses].
  double mass_width = 0.8;
  double mass_error = 0.15;    ///< Of the tabulated mass [dex].
  double mass_missing = 0.05;  ///< Fraction of supernovae whose host mass is not known.
};

/// Peculiar velocities: independent Gaussians and a bulk flow of the whole volume, in the CMB frame.
struct SimulatedVelocities {
  double sigma_v = 250.0;       ///< One component [km/s].
  double bulk_speed = 0.0;      ///< [km/s], towards
  Galactic bulk_direction;      ///< this direction [deg].
  bool bulk_tabulated = false;  ///< Put the bulk flow's part of each velocity into the column v_pec.
  SunMotion sun;
};

/// Dust of the Milky Way, in a plane-parallel layer with clouds.
struct SimulatedMilkyWay {
  DustLaw law = DustLaw::fitzpatrick99;
  double r_v = 3.1;
  double ebv_at_pole = 0.015;  ///< Median E(B−V) at the Galactic poles [mag]; goes with 1/sin|b|.
  double clumpiness = 0.4;     ///< Scatter of its logarithm.
  double ebv_max = 0.3;        ///< No supernova is found behind more [mag].
  double table_error = 0.0;    ///< Fractional error of the tabulated reddening.
};

/// A passband of a smooth-edged box between centre ± width/2, on the AB system.
struct SimulatedPassband {
  std::string id;
  double centre = 0;            ///< [angstrom].
  double width = 0;             ///< Between the half-height points [angstrom].
  double edge = 150;            ///< Over which an edge rises [angstrom].
  double zero_point_error = 0;  ///< As the catalogue states it [mag].
  double wavelength_error = 0;  ///< [angstrom].
  /// What the calibration gets wrong: tabulated magnitudes come out this much too faint [mag].
  double zero_point_shift = 0;
  double wavelength_shift = 0;  ///< The true curve stands this far redward of the catalogue's [angstrom].
};

/// One band of a survey.
struct SurveyBand {
  std::string passband;
  double depth = 21;  ///< Magnitude (AB) at which one visit has a signal-to-noise ratio of 5.
};

/// Where a survey looks.
struct SimulatedFootprint {
  double dec_min = -90, dec_max = 90;  ///< [deg].
  double ra_min = 0, ra_max = 360;     ///< [deg].
  double galactic_latitude_min = 10;   ///< |b| above this [deg].
};

struct SimulatedSurvey {
  std::string name;
  std::string prefix;  ///< Supernovae are called prefix-001 and so on; the survey's name if empty.
  std::size_t supernovae = 100;
  double z_min = 0.01, z_max = 0.1;  ///< Of the flow; constant rate in comoving volume and source time between.
  double z_error = 0.0;              ///< Error of the tabulated redshift.
  SimulatedFootprint footprint;
  std::vector<SurveyBand> bands;

  double first_mjd = 58000;      ///< Start of the first season [d].
  int seasons = 3;               ///< One a year,
  double season_length = 220;    ///< [d].
  double cadence = 4;            ///< [d].
  double cadence_scatter = 0.5;  ///< [d].
  double lost = 0.2;             ///< Fraction of visits lost to weather and Moon.
  double first_phase = -12;      ///< Rest-frame phase of the first visit, on average [d],
  double first_phase_scatter = 3;
  double last_phase = 40;      ///< and of the last [d].
  double depth_scatter = 0.2;  ///< From visit to visit [mag].
  double noise_floor = 0.01;   ///< Error added in quadrature, as a fraction of the flux.
  bool magnitudes = false;     ///< Written as magnitudes (visits above 3 sigma alone) instead of fluxes.

  int detections = 0;           ///< Visits in one band with a signal-to-noise ratio above `detection_snr` that it takes
  double detection_snr = 5;     ///< to find a supernova.
  double peak_limit = 99;       ///< m_B at which half of the supernovae are found [mag],
  double peak_limit_width = 0;  ///< and the width of the fall [mag].

  std::string shared_with;  ///< An earlier survey, of whose supernovae
  std::size_t shared = 0;   ///< the first so many within this one's redshifts are observed here too.
};

/// Supernovae in nearby hosts whose distances a ladder below has measured. They follow the same relation.
struct SimulatedCalibrators {
  std::size_t supernovae = 0;
  std::size_t shared_hosts = 0;           ///< So many hosts have two of them.
  std::vector<std::string> surveys;       ///< Who observe them, host by host in turn; empty: the first survey.
  double z_min = 0.004, z_max = 0.01;     ///< Of the flow.
  double modulus_error = 0.06;            ///< Of each host's distance modulus [mag].
  double common_error = 0.0;              ///< Of all of them together [mag].
  std::string prefix = "Near";            ///< Supernovae are called prefix-001 and so on,
  std::string host_prefix = "Near host";  ///< and hosts "host_prefix 1".
};

struct SimulationOptions {
  std::uint64_t seed = 1;
  SimulatedRelation relation;
  SimulatedPopulation population;
  SimulatedVelocities velocities;
  SimulatedMilkyWay milky_way;
  bool template_scatter = true;  ///< Scatter light curves about the template by its ε and κ.
  std::vector<SimulatedPassband> passbands;
  std::vector<SimulatedSurvey> surveys;
  SimulatedCalibrators calibrators;
  int threads = 0;                                  ///< 0: all cores. The result does not depend on it.
  std::string origin = "the simulation's options";  ///< Named in messages.
};

/// Throws InputError naming the setting that is out of range, contradicts another or refers to something unknown.
void check_simulation(const SimulationOptions& options);

}  // namespace thirdrung
