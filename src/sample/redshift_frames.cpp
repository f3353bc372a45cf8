#include "sample/redshift_frames.h"

#include <fmt/format.h>

#include <array>
#include <cmath>
#include <stdexcept>

#include "base/constants.h"
#include "base/error.h"
#include "base/text.h"
#include "sky/position.h"

namespace thirdrung {
namespace {

using constants::speed_of_light_km_s;

constexpr std::array<const char*, 4> source_names = {"none", "column", "infall", "grid"};

void remark(Redshifts& z, const std::string& text) {
  z.remarks += (z.remarks.empty() ? "" : "; ") + text;
}

void from_column(Redshifts& z, const Supernova& supernova, double scale) {
  z.velocity_missing = std::isnan(supernova.v_pec);
  if (z.velocity_missing) {
    remark(z, "no v_pec in the table, none taken off");
  } else {
    z.v_pec = scale * supernova.v_pec;
  }
  z.z_flow = z_flow_from_cmb(z.z_cmb, z.v_pec);
}

void from_infall(Redshifts& z, const Galactic& where, const RedshiftOptions& options) {
  const InfallResult flow = infall_flow(z.z_helio_used, where, options.sun, options.infall);
  z.v_pec = flow.v_pec;
  z.z_flow = flow.z_flow;
  if (!flow.inside.empty()) remark(z, "in the region of " + flow.inside);
}

void from_grid(Redshifts& z, const Galactic& where, const VelocityGrid& grid) {
  const GridFlow flow = grid.flow(z.z_cmb, where);
  z.v_pec = flow.v_pec;
  z.z_flow = flow.z_flow;
  z.velocity_missing = !flow.inside;
  if (!flow.inside) remark(z, "outside the velocity field");
  if (flow.distances > 1) remark(z, fmt::format("{} distances fit its redshift, the middle one taken", flow.distances));
}

}  // namespace

VelocitySource velocity_source_from_name(const std::string& name, const Place& place) {
  for (std::size_t i = 0; i < source_names.size(); ++i) {
    if (name == source_names[i]) return static_cast<VelocitySource>(i);
  }
  throw InputError(place, fmt::format("'{}' is no source of peculiar velocities", name),
                   "write none, column, infall or grid");
}

std::string name_of(VelocitySource source) {
  return source_names.at(static_cast<std::size_t>(source));
}

Redshifts redshifts_of(const Supernova& supernova, const RedshiftOptions& options) {
  Redshifts z;
  const bool group = options.use_group && !std::isnan(supernova.z_group);
  z.z_helio_used = (group ? supernova.z_group : supernova.z_helio) + options.z_offset;
  if (group) remark(z, "redshift of the group");
  const Galactic where = galactic_from_icrs(supernova.ra, supernova.dec);
  z.z_cmb = z_cmb_from_helio(z.z_helio_used, where, options.sun);
  switch (options.velocity) {
    case VelocitySource::none:
      z.z_flow = z.z_cmb;
      break;
    case VelocitySource::column:
      from_column(z, supernova, options.column_scale);
      break;
    case VelocitySource::infall:
      from_infall(z, where, options);
      break;
    case VelocitySource::grid:
      if (!options.grid) throw std::logic_error("a velocity field is asked for and none is given");
      from_grid(z, where, *options.grid);
      break;
  }
  // Both errors act on 1 + z_helio, respectively 1 + z_cmb, as factors, so they carry to 1 + z_flow in proportion.
  const double from_redshift =
      std::isnan(supernova.z_helio_error) ? 0.0 : supernova.z_helio_error / (1.0 + z.z_helio_used);
  const double from_velocity = options.sigma_v / (speed_of_light_km_s + z.v_pec);
  z.z_flow_error = (1.0 + z.z_flow) * std::hypot(from_redshift, from_velocity);
  return z;
}

RedshiftResult redshifts_of_sample(const std::vector<Supernova>& supernovae, const RedshiftOptions& options) {
  RedshiftResult result;
  for (const Supernova& s : supernovae) {
    result.redshifts.push_back(redshifts_of(s, options));
    const Redshifts& z = result.redshifts.back();
    if (z.velocity_missing) ++result.without_velocity;
    if (!(z.z_flow > 0.0)) {
      result.set_aside.push_back({s.name, s.survey, fmt::format("its flow redshift is {:.5f}", z.z_flow)});
    }
  }
  if (!supernovae.empty() && result.without_velocity == supernovae.size()) {
    const std::string file = supernovae.front().place.file;
    if (options.velocity == VelocitySource::column) {
      throw InputError({file, std::nullopt, "v_pec"}, "holds no peculiar velocity for any supernova",
                       "give the column v_pec (km/s) or choose another source of velocities");
    }
    throw InputError({options.grid->cube().origin, std::nullopt, ""}, "covers none of the supernovae",
                     "check its units (Mpc/h) and axes (Galactic), or choose another source of velocities");
  }
  return result;
}

}  // namespace thirdrung
