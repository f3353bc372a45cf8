#include "report/sky_map.h"

#include <algorithm>
#include <cmath>

#include "base/constants.h"

namespace thirdrung {
namespace {

using constants::degree;
using constants::pi;

/// Point of the galactic plane at galactic longitude l. North galactic pole and node of J2000: ra 192.85948°,
/// dec 27.12825°, longitude of the celestial pole 122.93192° (ESA 1997, The Hipparcos Catalogue, vol. 1,
/// section 1.5.3).
std::pair<double, double> plane_of_the_galaxy(double l_deg) {
  const double pole_ra = 192.85948, pole_dec = 27.12825 * degree, node = 122.93192;
  const double angle = (node - l_deg) * degree;
  const double dec = std::asin(std::cos(pole_dec) * std::cos(angle));
  const double ra = std::atan2(std::sin(angle), -std::sin(pole_dec) * std::cos(angle));
  return {pole_ra + ra / degree, dec / degree};
}

MapLine meridian(double ra, int kind) {
  MapLine line{kind, {}};
  for (int dec = -90; dec <= 90; dec += 3) line.points.push_back(on_sky_map(ra, dec));
  return line;
}

}  // namespace

MapPoint on_sky_map(double ra_deg, double dec_deg) {
  // Half a turn either side of the middle; the nudge keeps the two edges apart.
  double offset = std::remainder(ra_deg - 180.0, 360.0) * degree;
  offset = std::clamp(offset, -pi, pi);
  const double dec = dec_deg * degree;
  const double stretch = std::sqrt(2.0 / (1.0 + std::cos(dec) * std::cos(offset / 2)));
  return {-2.0 * stretch * std::cos(dec) * std::sin(offset / 2), stretch * std::sin(dec)};
}

std::vector<MapLine> sky_map_lines() {
  std::vector<MapLine> lines;
  MapLine outline{0, {}};
  for (int dec = -90; dec <= 90; dec += 3) outline.points.push_back(on_sky_map(1e-9, dec));
  for (int dec = 90; dec >= -90; dec -= 3) outline.points.push_back(on_sky_map(360 - 1e-9, dec));
  lines.push_back(std::move(outline));
  for (int ra = 60; ra <= 300; ra += 60) lines.push_back(meridian(ra, 1));
  for (int dec = -60; dec <= 60; dec += 30) {
    MapLine line{1, {}};
    for (int ra = 0; ra <= 360; ra += 4)
      line.points.push_back(on_sky_map(std::clamp(double(ra), 1e-9, 360 - 1e-9), dec));
    lines.push_back(std::move(line));
  }
  MapLine plane{2, {}};
  for (int l = 0; l <= 360; l += 2) {
    const auto [ra, dec] = plane_of_the_galaxy(l);
    const MapPoint point = on_sky_map(ra, dec);
    if (!plane.points.empty() && std::abs(point.x - plane.points.back().x) > 1.0) {
      lines.push_back(plane);
      plane.points.clear();
    }
    plane.points.push_back(point);
  }
  lines.push_back(std::move(plane));
  return lines;
}

}  // namespace thirdrung
