// Prints what the sky room says, for checks against reference libraries: lines of numbers in, lines of numbers out.
//   sky_values positions            ra dec z_helio -> l b z_cmb d_L(series) d_L(flat LCDM, 0.3) d_C(flat LCDM, 0.3)
//   [Mpc/h] sky_values lambert NORTH SOUTH  ra dec -> E(B-V) sky_values healpix MAP          ra dec -> E(B-V)
//   sky_values grid CUBE            ra dec z_cmb -> z_flow v_pec inside
#include <fmt/core.h>

#include <iostream>
#include <string>
#include <vector>

#include "base/error.h"
#include "sky/dust_map.h"
#include "sky/expansion.h"
#include "sky/position.h"
#include "sky/sun_motion.h"
#include "sky/velocity_grid.h"

namespace {

using namespace thirdrung;

void positions() {
  double ra = 0.0;
  double dec = 0.0;
  double z = 0.0;
  const Expansion lcdm = Expansion::flat_lcdm(0.3);
  while (std::cin >> ra >> dec >> z) {
    const Galactic g = galactic_from_icrs(ra, dec);
    fmt::print("{:.15g} {:.15g} {:.15g} {:.15g} {:.15g} {:.15g}\n", g.l, g.b, z_cmb_from_helio(z, g),
               luminosity_distance(z, Expansion{}), luminosity_distance(z, lcdm), comoving_distance_mpc_h(z, lcdm));
  }
}

void reddening(const DustMap& map) {
  double ra = 0.0;
  double dec = 0.0;
  while (std::cin >> ra >> dec) fmt::print("{:.15g}\n", map.ebv(ra, dec).value_or(-1.0));
}

void velocities(const VelocityGrid& grid) {
  double ra = 0.0;
  double dec = 0.0;
  double z = 0.0;
  while (std::cin >> ra >> dec >> z) {
    const GridFlow flow = grid.flow(z, galactic_from_icrs(ra, dec));
    fmt::print("{:.15g} {:.15g} {}\n", flow.z_flow, flow.v_pec, flow.inside ? 1 : 0);
  }
}

int run(const std::vector<std::string>& words) {
  if (words.size() == 1 && words[0] == "positions") {
    positions();
  } else if (words.size() == 3 && words[0] == "lambert") {
    reddening(DustMap::lambert(words[1], words[2]));
  } else if (words.size() == 2 && words[0] == "healpix") {
    reddening(DustMap::healpix(words[1]));
  } else if (words.size() == 2 && words[0] == "grid") {
    VelocityGridOptions options;
    options.expansion = Expansion::flat_lcdm(0.3);
    velocities(VelocityGrid::read(words[1], options));
  } else {
    fmt::print(stderr, "usage: sky_values positions | lambert NORTH SOUTH | healpix MAP | grid CUBE\n");
    return static_cast<int>(ExitCode::usage);
  }
  return 0;
}

}  // namespace

int main(int count, char** arguments) {
  try {
    return run({arguments + 1, arguments + count});
  } catch (const std::exception& error) {
    fmt::print(stderr, "{}\n", error.what());
    return static_cast<int>(ExitCode::input);
  }
}
