#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "base/constants.h"
#include "base/error.h"
#include "sky/dust_map.h"
#include "sky/fits_input.h"

namespace thirdrung {
namespace {

using constants::degree;

// One image about one pole. Pixel coordinates count from 0 at the centre of the first pixel.
struct PolarImage {
  long width = 0;
  long height = 0;
  double pole = 1.0;  // +1 north, −1 south
  double scale = 0.0;
  double x_pole = 0.0;
  double y_pole = 0.0;
  std::vector<float> pixels;
};

void refuse(const FitsInput& file, const std::string& keyword, const std::string& fault, const std::string& remedy) {
  throw InputError({file.name(), std::nullopt, keyword}, fault, remedy);
}

double scale_of(const FitsInput& file) {
  if (const auto stated = file.number("LAM_SCAL")) return *stated;
  if (file.text("CTYPE1").value_or("") != "GLON-ZEA") {
    refuse(file, "LAM_SCAL", "is missing and CTYPE1 is not GLON-ZEA", "give a Lambert image about a Galactic pole");
  }
  // Zenithal equal area: radius = (180/π) sqrt(2(1 − n sin b)) degrees (Calabretta & Greisen 2002, A&A 395, 1077, eq.
  // 69).
  const auto matrix = file.number("CD1_1");
  const double pixel = std::abs(matrix ? *matrix : file.required_number("CDELT1"));
  return std::sqrt(2.0) / degree / pixel;
}

double pole_of(const FitsInput& file) {
  if (const auto stated = file.number("LAM_NSGP")) return *stated;
  return file.required_number("CRVAL2") / 90.0;
}

PolarImage read_polar(const std::filesystem::path& path, double wanted_pole) {
  FitsInput file(path);
  file.to_image(2);
  const std::string unit = file.text("BUNIT").value_or("");
  if (!unit.empty() && unit.find("mag") == std::string::npos) {
    refuse(file, "BUNIT", fmt::format("is '{}'", unit), "give a map of E(B-V) in mag");
  }
  PolarImage image;
  const auto size = file.image_size();
  image.width = size[0];
  image.height = size[1];
  if (image.width < 2 || image.height < 2)
    refuse(file, "NAXIS1", "is below 2", "give an image of at least 2 by 2 pixels");
  image.scale = scale_of(file);
  if (!(image.scale > 0.0)) refuse(file, "LAM_SCAL", "is not positive", "give the pixels from the pole to the equator");
  image.pole = pole_of(file);
  if (image.pole != wanted_pole) {
    refuse(file, "LAM_NSGP", fmt::format("is {:g} where {:g} is needed", image.pole, wanted_pole),
           "name the image of the northern Galactic cap first, the southern second");
  }
  image.x_pole = file.required_number("CRPIX1") - 1.0;
  image.y_pole = file.required_number("CRPIX2") - 1.0;
  if (file.text("CTYPE1").value_or("") == "LAMBERT--X") {
    image.x_pole -= file.number("CRVAL1").value_or(0.0);
    image.y_pole -= file.number("CRVAL2").value_or(0.0);
  }
  image.pixels = file.image();
  return image;
}

// Bilinear; pixels without a value are left out and the others' weights scaled up.
std::optional<double> at(const PolarImage& image, const Galactic& where) {
  const double radius = image.scale * std::sqrt(std::max(0.0, 1.0 - image.pole * std::sin(where.b * degree)));
  const double x = image.x_pole + radius * std::cos(where.l * degree);
  const double y = image.y_pole - image.pole * radius * std::sin(where.l * degree);
  const double x_low = std::clamp(std::floor(x), 0.0, static_cast<double>(image.width - 2));
  const double y_low = std::clamp(std::floor(y), 0.0, static_cast<double>(image.height - 2));
  const double fx = std::clamp(x - x_low, 0.0, 1.0);
  const double fy = std::clamp(y - y_low, 0.0, 1.0);
  const auto first =
      static_cast<std::size_t>(x_low) + static_cast<std::size_t>(y_low) * static_cast<std::size_t>(image.width);
  const std::size_t row = static_cast<std::size_t>(image.width);
  double sum = 0.0;
  double weights = 0.0;
  const auto add = [&](std::size_t pixel, double weight) {
    if (weight <= 0.0 || !std::isfinite(image.pixels[pixel])) return;
    sum += weight * static_cast<double>(image.pixels[pixel]);
    weights += weight;
  };
  add(first, (1.0 - fx) * (1.0 - fy));
  add(first + 1, fx * (1.0 - fy));
  add(first + row, (1.0 - fx) * fy);
  add(first + row + 1, fx * fy);
  if (weights <= 0.0) return std::nullopt;
  return sum / weights;
}

class LambertPair : public DustMap::Layout {
 public:
  LambertPair(PolarImage north, PolarImage south) : north_(std::move(north)), south_(std::move(south)) {}
  std::optional<double> value(double ra, double dec) const override {
    const Galactic where = galactic_from_icrs(ra, dec);
    return at(where.b >= 0.0 ? north_ : south_, where);
  }

 private:
  PolarImage north_;
  PolarImage south_;
};

}  // namespace

DustMap DustMap::lambert(const std::filesystem::path& north, const std::filesystem::path& south,
                         const DustMapOptions& options) {
  return DustMap(std::make_shared<LambertPair>(read_polar(north, 1.0), read_polar(south, -1.0)), options.recalibration,
                 fmt::format("Lambert pair {}, {}", north.filename().string(), south.filename().string()));
}

}  // namespace thirdrung
