#include <fmt/format.h>
#include <healpix_cxx/healpix_base.h>
#include <healpix_cxx/pointing.h>

#include <cctype>
#include <cmath>

#include "base/constants.h"
#include "base/error.h"
#include "sky/dust_map.h"
#include "sky/fits_input.h"

namespace thirdrung {
namespace {

using constants::degree;

// The HEALPix convention for "not observed" is −1.6375e30; no reddening is anywhere near.
constexpr float unobserved_below = -1e29F;

void refuse(const FitsInput& file, const std::string& keyword, const std::string& fault, const std::string& remedy) {
  throw InputError({file.name(), std::nullopt, keyword}, fault, remedy);
}

Healpix_Ordering_Scheme ordering_of(const FitsInput& file) {
  const std::string name = file.required_text("ORDERING");
  if (name == "RING") return RING;
  if (name == "NESTED" || name == "NEST") return NEST;
  refuse(file, "ORDERING", fmt::format("is '{}'", name), "write RING or NESTED");
  return RING;
}

bool is_galactic(const FitsInput& file, const DustMapOptions& options) {
  const auto stated = file.text("COORDSYS");
  std::string frame = stated ? *stated : file.text("SKYCOORD").value_or(options.healpix_frame);
  for (char& letter : frame) letter = static_cast<char>(std::tolower(static_cast<unsigned char>(letter)));
  if (frame == "g" || frame == "galactic") return true;
  if (frame == "c" || frame == "q" || frame == "celestial" || frame == "equatorial" || frame == "icrs") return false;
  if (frame.empty()) {
    refuse(file, "COORDSYS", "is missing from the header", "say in the run file whether the map is galactic or icrs");
  }
  refuse(file, "COORDSYS", fmt::format("is '{}'", frame), "give a map in Galactic (G) or equatorial (C) coordinates");
  return false;
}

class HealpixMap : public DustMap::Layout {
 public:
  HealpixMap(const Healpix_Base& grid, bool galactic, std::vector<float> values)
      : grid_(grid), galactic_(galactic), values_(std::move(values)) {}

  std::optional<double> value(double ra, double dec) const override {
    double longitude = ra;
    double latitude = dec;
    if (galactic_) {
      const Galactic where = galactic_from_icrs(ra, dec);
      longitude = where.l;
      latitude = where.b;
    }
    fix_arr<int, 4> pixels;
    fix_arr<double, 4> weights;
    grid_.get_interpol(pointing((90.0 - latitude) * degree, longitude * degree), pixels, weights);
    double sum = 0.0;
    double total = 0.0;
    for (tsize i = 0; i < 4; ++i) {
      const float found = values_[static_cast<std::size_t>(pixels[i])];
      if (!std::isfinite(found) || found < unobserved_below) continue;
      sum += weights[i] * static_cast<double>(found);
      total += weights[i];
    }
    if (total <= 0.0) return std::nullopt;
    return sum / total;
  }

 private:
  Healpix_Base grid_;
  bool galactic_;
  std::vector<float> values_;
};

}  // namespace

DustMap DustMap::healpix(const std::filesystem::path& path, const DustMapOptions& options) {
  FitsInput file(path);
  file.to_table();
  const double nside = file.required_number("NSIDE");
  if (!(nside >= 1.0 && nside <= 8192.0 && nside == std::floor(nside))) {
    refuse(file, "NSIDE", fmt::format("is {:g}", nside), "give a whole number from 1 to 8192");
  }
  const Healpix_Ordering_Scheme scheme = ordering_of(file);
  const int sides = static_cast<int>(nside);
  if (scheme == NEST && (sides & (sides - 1)) != 0) {
    refuse(file, "NSIDE", fmt::format("is {} in nested order", sides), "give a power of two, or ring order");
  }
  const std::string unit = file.text("TUNIT1").value_or("");
  if (options.column.empty() && !unit.empty() && unit.find("mag") == std::string::npos) {
    refuse(file, "TUNIT1", fmt::format("is '{}'", unit), "name the column that holds E(B-V) in mag");
  }
  const bool galactic = is_galactic(file, options);
  std::vector<float> values = file.column(options.column);
  const Healpix_Base grid(sides, scheme, SET_NSIDE);
  if (values.size() != static_cast<std::size_t>(grid.Npix())) {
    refuse(file, "NSIDE", fmt::format("asks for {} pixels where the table has {}", grid.Npix(), values.size()),
           "give a full-sky map");
  }
  return DustMap(std::make_shared<HealpixMap>(grid, galactic, std::move(values)), options.recalibration,
                 fmt::format("HEALPix map {}", path.filename().string()));
}

}  // namespace thirdrung
