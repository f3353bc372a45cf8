#pragma once

#include <memory>
#include <string>
#include <vector>

#include "sample/supernova.h"
#include "sky/infall.h"
#include "sky/sun_motion.h"
#include "sky/velocity_grid.h"

namespace thirdrung {

/// Where the peculiar velocity of a supernova comes from.
enum class VelocitySource {
  none,    ///< v_pec = 0: z_flow = z_cmb.
  column,  ///< v_pec of the table.
  infall,  ///< The built-in infall model (Mould et al. 2000).
  grid     ///< A gridded velocity field from a file.
};

/// "none", "column", "infall" or "grid"; throws InputError at `place` otherwise.
VelocitySource velocity_source_from_name(const std::string& name, const Place& place);
std::string name_of(VelocitySource source);

struct RedshiftOptions {
  SunMotion sun;
  VelocitySource velocity = VelocitySource::none;
  InfallOptions infall;                      ///< For VelocitySource::infall.
  std::shared_ptr<const VelocityGrid> grid;  ///< For VelocitySource::grid; must not be null then.
  double column_scale = 1.0;                 ///< Multiplies v_pec of the table, for varying the field.
  bool use_group = true;                     ///< z_group in place of z_helio where given.
  double sigma_v = 250.0;                    ///< Scatter of the velocities left over [km/s].
  double z_offset = 0.0;                     ///< Added to every heliocentric redshift, for varying its calibration.
};

/// One supernova's redshifts. `z_helio_used` is that of the group where one is used; the light curve and the (1 + z) of
/// the luminosity distance keep the host's own.
struct Redshifts {
  double z_helio_used = missing_value;
  double z_cmb = missing_value;
  double v_pec = 0.0;  ///< [km/s], away from us positive.
  double z_flow = missing_value;
  double z_flow_error = missing_value;  ///< Redshift error and σ_v, in quadrature; an absent z_helio_error counts as 0.
  std::string remarks;                  ///< In words; "; " between.
  bool velocity_missing = false;        ///< v_pec was asked for and is not known: 0 (or the external flow) was used.
};

/// Heliocentric to CMB frame to flow: (1 + z_helio) = (1 + z_cmb)(1 + z_sun), (1 + z_cmb) = (1 + z_flow)(1 + v_pec/c).
Redshifts redshifts_of(const Supernova& supernova, const RedshiftOptions& options);

struct RedshiftResult {
  std::vector<Redshifts> redshifts;  ///< One each, in order.
  std::size_t without_velocity = 0;  ///< How many have no peculiar velocity of the source asked for.
  std::vector<SetAside> set_aside;   ///< Supernovae whose flow redshift is not positive. Their entry above stays.
};

/// As redshifts_of, for a sample. Throws InputError if no supernova has the v_pec that VelocitySource::column asks for,
/// or if all of them lie outside the grid.
RedshiftResult redshifts_of_sample(const std::vector<Supernova>& supernovae, const RedshiftOptions& options);

}  // namespace thirdrung
