#pragma once

#include <string>
#include <vector>

#include "sample/supernova.h"
#include "simulation/random_stream.h"
#include "simulation/simulation_options.h"

namespace thirdrung {

/// What is true of one simulated supernova.
struct SupernovaTruth {
  std::string name;
  double t_0 = 0;  ///< Date of B maximum, observer frame [d].
  double m_b = 0, s = 0, c = 0;
  double z_flow = 0;  ///< Of the smooth expansion.
  double z_cmb = 0;   ///< With its peculiar velocity.
  double z_helio = 0;
  double v_pec = 0;        ///< Away from us positive [km/s].
  double bulk_v_pec = 0;   ///< The bulk flow's part of it.
  double ra = 0, dec = 0;  ///< ICRS [deg].
  double mw_ebv = 0;       ///< [mag].
  double host_log_mass = 0;
  double intrinsic = 0;  ///< The draw of σ_int: positive is faint [mag].
};

/// Redshifts of a constant rate per comoving volume and source time: p(z) ∝ d_C² (dd_C/dz) / (1 + z).
class VolumeRedshifts {
 public:
  VolumeRedshifts(double z_min, double z_max, const Expansion& expansion);
  /// Redshift below which the fraction `part` of the supernovae lies.
  double quantile(double part) const;

 private:
  std::vector<double> z_;
  std::vector<double> cumulative_;
};

/// One supernova in the volume of a survey; no selection but that of the sky (footprint, largest Milky Way reddening).
SupernovaTruth draw_supernova(const SimulationOptions& options, const SimulatedSurvey& survey,
                              const VolumeRedshifts& redshifts, RandomStream& stream);

/// Peak magnitude at given redshifts, stretch, colour and host, without intrinsic scatter.
double relation_magnitude(const SimulatedRelation& relation, const SupernovaTruth& truth);

/// Whether the survey finds a supernova of this peak magnitude.
bool is_found(const SimulatedSurvey& survey, double m_b, RandomStream& stream);

/// The row of the survey's supernova table: the truth with the errors of redshift, reddening and host mass.
Supernova tabulated(const SimulationOptions& options, const SimulatedSurvey& survey, const SupernovaTruth& truth,
                    RandomStream& stream);

}  // namespace thirdrung
