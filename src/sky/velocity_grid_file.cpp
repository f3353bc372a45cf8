#include <fmt/format.h>

#include "base/error.h"
#include "sky/fits_input.h"
#include "sky/velocity_grid.h"

namespace thirdrung {
namespace {

void demand(const FitsInput& file, const std::string& keyword, const std::string& wanted) {
  const std::string found = file.required_text(keyword);
  if (found == wanted) return;
  throw InputError({file.name(), std::nullopt, keyword}, fmt::format("is '{}'", found),
                   fmt::format("convert the field and write '{}' (docs/velocity-field.md)", wanted));
}

VelocityCube::Space space_of(const FitsInput& file) {
  const std::string name = file.text("VSPACE").value_or("REAL");
  if (name == "REAL") return VelocityCube::Space::real;
  if (name == "REDSHIFT") return VelocityCube::Space::redshift;
  throw InputError({file.name(), std::nullopt, "VSPACE"}, fmt::format("is '{}'", name), "write 'REAL' or 'REDSHIFT'");
}

}  // namespace

VelocityGrid VelocityGrid::read(const std::filesystem::path& path, const VelocityGridOptions& options) {
  FitsInput file(path);
  file.to_image(3);
  const std::vector<long> size = file.image_size();
  if (size.size() > 4 || (size.size() == 4 && size[3] != 3)) {
    throw InputError({file.name(), std::nullopt, "NAXIS"}, "is neither a cube nor three cubes",
                     "give 3 axes with radial velocities, or 4 axes of which the last holds the three components");
  }
  demand(file, "BUNIT", "km/s");
  demand(file, "VFRAME", "CMB");
  demand(file, "VAXES", "GALACTIC");

  VelocityCube cube;
  cube.origin = file.name();
  cube.radial = size.size() == 3;
  cube.space = space_of(file);
  for (std::size_t axis = 0; axis < 3; ++axis) {
    const std::string n = std::to_string(axis + 1);
    demand(file, "CUNIT" + n, "Mpc/h");
    cube.size[axis] = static_cast<std::size_t>(size[axis]);
    cube.step[axis] = file.required_number("CDELT" + n);
    cube.first[axis] = file.required_number("CRVAL" + n) + (1.0 - file.required_number("CRPIX" + n)) * cube.step[axis];
  }
  cube.beta = file.number("VBETA");
  cube.external = {file.number("VEXT_X").value_or(0.0), file.number("VEXT_Y").value_or(0.0),
                   file.number("VEXT_Z").value_or(0.0)};
  cube.velocities = file.image();
  return VelocityGrid(std::move(cube), options);
}

}  // namespace thirdrung
