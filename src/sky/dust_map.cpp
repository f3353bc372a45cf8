#include "sky/dust_map.h"

#include <fmt/format.h>

#include "base/error.h"

namespace thirdrung {

DustMap::DustMap(std::shared_ptr<const Layout> layout, double recalibration, std::string description)
    : layout_(std::move(layout)),
      recalibration_(recalibration),
      description_(fmt::format("{}, times {:g}", description, recalibration)) {
  if (!(recalibration > 0.0)) {
    throw InputError({description, std::nullopt, ""}, fmt::format("has a recalibration factor of {:g}", recalibration),
                     "give a positive factor, 1 for none");
  }
}

std::optional<double> DustMap::ebv(double ra, double dec) const {
  const auto found = layout_->value(ra, dec);
  if (!found) return std::nullopt;
  return recalibration_ * *found;
}

}  // namespace thirdrung
