#pragma once

#include <array>
#include <cstddef>
#include <filesystem>
#include <optional>
#include <string>
#include <vector>

#include "sky/expansion.h"
#include "sky/position.h"

namespace thirdrung {

/// Peculiar velocities on a regular grid in space, as read from a FITS cube (docs/velocity-field.md).
struct VelocityCube {
  /// Whether voxels stand at true distances, or at the distances that the redshifts in the CMB frame would have.
  enum class Space { real, redshift };

  std::array<std::size_t, 3> size = {};  ///< Voxels along x, y, z.
  std::array<double, 3> first = {};      ///< Centre of the first voxel [Mpc/h].
  std::array<double, 3> step = {};       ///< Distance of voxel centres [Mpc/h], may be negative.
  bool radial = false;                   ///< True: one radial velocity a voxel; false: three components.
  std::vector<float> velocities;  ///< [km/s] in the CMB frame, x fastest, then y, z, component. NaN: not covered.
  Space space = Space::real;
  std::optional<double> beta;           ///< β = f(Ω)/b that the velocities are for.
  std::array<double, 3> external = {};  ///< Flow of the whole volume, not yet in `velocities` [km/s], Galactic x, y, z.
  std::string origin;                   ///< File it came from.
};

struct VelocityGridOptions {
  /// What a supernova outside the grid gets: no correction, or the external flow alone.
  enum class Outside { no_correction, external_flow };

  std::optional<double> beta;  ///< Scales the grid by beta/(the file's β). InputError if the file states none.
  double scale = 1.0;          ///< Scales the grid (not the external flow) by a plain factor.
  std::optional<std::array<double, 3>> external;  ///< Replaces the file's external flow [km/s], Galactic x, y, z.
  Outside outside = Outside::no_correction;
  Expansion expansion;  ///< Turns z_flow into a comoving distance in Mpc/h.
};

struct GridFlow {
  double z_flow = 0.0;
  double v_pec = 0.0;  ///< [km/s].
  bool inside = true;  ///< False: the supernova lies outside the grid.
  int distances = 1;   ///< How many distances fit the redshift; more than one near a mass concentration.
};

/// A gridded velocity field, ready to be asked for the peculiar velocity of a supernova.
///
/// Axes are Galactic: x towards (l, b) = (0, 0), y towards (90, 0), z towards b = 90; we are at (0, 0, 0). Between
/// voxel centres the field is trilinear.
class VelocityGrid {
 public:
  /// Throws InputError for a missing or damaged file, a missing keyword, or a wrong unit, frame or coordinate system.
  static VelocityGrid read(const std::filesystem::path& path, const VelocityGridOptions& options = {});

  /// Throws InputError if the numbers of `cube` contradict each other.
  explicit VelocityGrid(VelocityCube cube, const VelocityGridOptions& options = {});

  /// Radial velocity [km/s] at a distance [Mpc/h], external flow included; nothing outside the grid.
  std::optional<double> radial_velocity(const Galactic& direction, double distance_mpc_h) const;

  /// Solves (1 + z_cmb) = (1 + z_flow)(1 + v(d(z_flow))/c) for z_flow.
  ///
  /// A field in real space is searched over ±3000 km/s about z_cmb for every distance that fits; of several the middle
  /// one is taken and their number is returned. A field in redshift space is read at the distance of z_cmb itself.
  GridFlow flow(double z_cmb, const Galactic& direction) const;

  const VelocityCube& cube() const { return cube_; }
  /// Distance of the nearest face [Mpc/h]: within it every direction is covered.
  double depth() const;

 private:
  double external_along(const Galactic& direction) const;
  double velocity_or_outside(const Galactic& direction, double z_flow, bool& inside) const;

  VelocityCube cube_;
  VelocityGridOptions options_;
  double scale_ = 1.0;
};

}  // namespace thirdrung
