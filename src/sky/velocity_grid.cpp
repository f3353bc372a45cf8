#include "sky/velocity_grid.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/constants.h"
#include "base/error.h"

namespace thirdrung {
namespace {

using constants::speed_of_light_km_s;

constexpr double search_half_width = 3000.0 / speed_of_light_km_s;
constexpr int search_steps = 300;

// Lower voxel and fraction along one axis; nothing outside the voxel centres (with room for rounding).
struct Cell {
  std::size_t lower = 0;
  double fraction = 0.0;
};

std::optional<Cell> cell_of(double position, double first, double step, std::size_t size) {
  const double index = (position - first) / step;
  const double last = static_cast<double>(size - 1);
  if (!(index >= -1e-9 && index <= last + 1e-9)) return std::nullopt;
  const double held = std::clamp(index, 0.0, last);
  const std::size_t lower = std::min(static_cast<std::size_t>(held), size - 2);
  return Cell{lower, held - static_cast<double>(lower)};
}

}  // namespace

VelocityGrid::VelocityGrid(VelocityCube cube, const VelocityGridOptions& options)
    : cube_(std::move(cube)), options_(options), scale_(options.scale) {
  const auto refuse = [&](const std::string& fault, const std::string& remedy) {
    throw InputError({cube_.origin, std::nullopt, ""}, fault, remedy);
  };
  std::size_t voxels = cube_.radial ? 1 : 3;
  for (std::size_t axis = 0; axis < 3; ++axis) {
    if (cube_.size[axis] < 2) refuse("has fewer than two voxels along an axis", "give a grid with at least two");
    if (!(std::abs(cube_.step[axis]) > 0.0))
      refuse("has a voxel size of zero", "give the size in Mpc/h in CDELT1 to CDELT3");
    voxels *= cube_.size[axis];
  }
  if (cube_.velocities.size() != voxels) refuse("has the wrong number of velocities", "give one or three a voxel");
  if (options_.beta) {
    if (!cube_.beta)
      refuse("does not state the β of its velocities", "add VBETA to its header or scale by a factor instead");
    scale_ *= *options_.beta / *cube_.beta;
  }
  if (options_.external) cube_.external = *options_.external;
}

double VelocityGrid::external_along(const Galactic& direction) const {
  return dot(unit_vector(direction.l, direction.b), cube_.external);
}

std::optional<double> VelocityGrid::radial_velocity(const Galactic& direction, double distance_mpc_h) const {
  const UnitVector n = unit_vector(direction.l, direction.b);
  std::array<Cell, 3> cells;
  for (std::size_t axis = 0; axis < 3; ++axis) {
    const auto cell = cell_of(n[axis] * distance_mpc_h, cube_.first[axis], cube_.step[axis], cube_.size[axis]);
    if (!cell) return std::nullopt;
    cells[axis] = *cell;
  }
  const std::size_t plane = cube_.size[0] * cube_.size[1];
  const std::size_t volume = plane * cube_.size[2];
  double sum = 0.0;
  for (std::size_t corner = 0; corner < 8; ++corner) {
    double weight = 1.0;
    std::array<std::size_t, 3> at = {};
    for (std::size_t axis = 0; axis < 3; ++axis) {
      const bool upper = ((corner >> axis) & 1U) != 0U;
      weight *= upper ? cells[axis].fraction : 1.0 - cells[axis].fraction;
      at[axis] = cells[axis].lower + (upper ? 1 : 0);
    }
    if (weight == 0.0) continue;
    const std::size_t voxel = at[0] + cube_.size[0] * at[1] + plane * at[2];
    double radial = cube_.velocities[voxel];
    if (!cube_.radial) {
      radial = n[0] * cube_.velocities[voxel] + n[1] * cube_.velocities[voxel + volume] +
               n[2] * cube_.velocities[voxel + 2 * volume];
    }
    sum += weight * radial;
  }
  if (!std::isfinite(sum)) return std::nullopt;
  return scale_ * sum + external_along(direction);
}

double VelocityGrid::velocity_or_outside(const Galactic& direction, double z_flow, bool& inside) const {
  const auto found = radial_velocity(direction, comoving_distance_mpc_h(std::max(0.0, z_flow), options_.expansion));
  inside = found.has_value();
  if (found) return *found;
  return options_.outside == VelocityGridOptions::Outside::external_flow ? external_along(direction) : 0.0;
}

GridFlow VelocityGrid::flow(double z_cmb, const Galactic& direction) const {
  GridFlow result;
  const auto finish = [&](double z_for_distance) {
    result.v_pec = velocity_or_outside(direction, z_for_distance, result.inside);
    result.z_flow = (1.0 + z_cmb) / (1.0 + result.v_pec / speed_of_light_km_s) - 1.0;
    return result;
  };
  if (cube_.space == VelocityCube::Space::redshift) return finish(z_cmb);

  // excess(z) > 0 where a supernova at z would be seen beyond z_cmb; every change of sign is a distance that fits.
  const auto excess = [&](double z) {
    bool inside = true;
    return (1.0 + z) * (1.0 + velocity_or_outside(direction, z, inside) / speed_of_light_km_s) - (1.0 + z_cmb);
  };
  std::vector<double> roots;
  const double step = 2.0 * search_half_width / search_steps;
  double low = std::max(0.0, z_cmb - search_half_width);
  double at_low = excess(low);
  while (low < z_cmb + search_half_width) {
    const double high = low + step;
    const double at_high = excess(high);
    if ((at_low <= 0.0) != (at_high <= 0.0)) {
      double a = low;
      double b = high;
      for (int i = 0; i < 60; ++i) {
        const double middle = 0.5 * (a + b);
        ((excess(middle) <= 0.0) == (at_low <= 0.0) ? a : b) = middle;
      }
      roots.push_back(0.5 * (a + b));
    }
    low = high;
    at_low = at_high;
  }
  result.distances = static_cast<int>(roots.size());
  return finish(roots.empty() ? z_cmb : roots[(roots.size() - 1) / 2]);
}

double VelocityGrid::depth() const {
  double nearest = INFINITY;
  for (std::size_t axis = 0; axis < 3; ++axis) {
    const double last = cube_.first[axis] + cube_.step[axis] * static_cast<double>(cube_.size[axis] - 1);
    const auto [low, high] = std::minmax(cube_.first[axis], last);
    nearest = std::min({nearest, -low, high});
  }
  return std::max(0.0, nearest);
}

}  // namespace thirdrung
