#pragma once

#include <vector>

namespace thirdrung {

/// A place on the equal-area map, in the unit of the sphere's radius; x runs from -2√2 to 2√2, y from -√2 to √2.
struct MapPoint {
  double x = 0, y = 0;
};

/// Equal-area map of the whole sky: the projection of Hammer (1892), as in Snyder 1987, USGS Professional Paper 1395,
/// and Calabretta & Greisen 2002, A&A 395, 1077, section 5.3.4.
///
/// Right ascension 180° in the middle, east to the left, as one sees it from below.
/// @param ra_deg,dec_deg degrees.
MapPoint on_sky_map(double ra_deg, double dec_deg);

/// Lines to draw on the map, each a run of points that may be joined: `kind` 0 outline, 1 grid, 2 galactic plane.
struct MapLine {
  int kind = 0;
  std::vector<MapPoint> points;
};
/// Outline, meridians every 60°, parallels every 30°, and the plane of the Galaxy, broken where it leaves the map's
/// edge.
std::vector<MapLine> sky_map_lines();

}  // namespace thirdrung
