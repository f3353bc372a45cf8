#include <fmt/format.h>

#include <map>

#include "base/error.h"
#include "pipeline/systematics_stage.h"
#include "tables/fits_image.h"

namespace thirdrung {

void write_shifts(const SystematicShifts& shifts, const std::filesystem::path& path) {
  std::vector<double> values;
  std::vector<std::string> names, kinds, units;
  std::vector<double> sizes;
  std::vector<bool> weighs;
  for (const SystematicShift& one : shifts.shifts) {
    values.insert(values.end(), one.shift.begin(), one.shift.end());
    names.push_back(one.name);
    kinds.push_back(one.kind);
    units.push_back(one.unit);
    sizes.push_back(one.size);
    weighs.push_back(one.weighs);
  }
  Table systematics;
  systematics.add_strings("name", names).add_strings("kind", kinds).add_reals("size", sizes);
  systematics.add_strings("unit_of_size", units);
  systematics.add_flags("weighs", weighs, "counts in the weights of a_b, not in its error alone");
  Table supernovae;
  supernovae.add_strings("supernova", shifts.supernovae);
  FitsWriter writer;
  writer.add_image("shifts", {shifts.shifts.size(), shifts.supernovae.size()}, values, "mag",
                   "of every standardised magnitude for +1 sigma, one row a systematic");
  writer.add_table(systematics, "systematics");
  writer.add_table(supernovae, "supernovae");
  writer.write(path);
}

SystematicShifts read_shifts(const std::filesystem::path& path) {
  const FitsReader reader(path);
  SystematicShifts out;
  out.supernovae = reader.table("supernovae").strings("supernova");
  const Table table = reader.table("systematics");
  const auto names = table.strings("name"), kinds = table.strings("kind"), units = table.strings("unit_of_size");
  const auto sizes = table.reals("size");
  const auto weighs = table.has("weighs") ? table.flags("weighs") : std::vector<bool>(names.size(), true);
  const FitsImage image = reader.image("shifts");
  const std::size_t n = out.supernovae.size();
  if (image.shape != std::vector<std::size_t>{names.size(), n}) {
    throw InputError({path.string(), std::nullopt, "shifts"},
                     fmt::format("the shifts are not {} by {}, as the tables beside them say", names.size(), n),
                     "make them again");
  }
  for (std::size_t k = 0; k < names.size(); ++k) {
    SystematicShift one;
    one.name = names[k];
    one.kind = kinds[k];
    one.size = sizes[k];
    one.unit = units[k];
    one.weighs = weighs[k];
    one.shift = Eigen::Map<const Eigen::VectorXd>(image.values.data() + k * n, static_cast<Eigen::Index>(n));
    out.shifts.push_back(std::move(one));
  }
  return out;
}

std::vector<SystematicShift> shifts_for(const SystematicShifts& shifts, const std::vector<std::string>& supernovae) {
  std::map<std::string, Eigen::Index> place;
  for (const std::string& name : shifts.supernovae) place.emplace(name, static_cast<Eigen::Index>(place.size()));
  std::vector<Eigen::Index> order;
  for (const std::string& name : supernovae) {
    const auto found = place.find(name);
    if (found == place.end()) {
      throw InputError({"systematic-shifts.fits", std::nullopt, "supernovae"},
                       fmt::format("has no shifts for {}", name), "make the systematics again");
    }
    order.push_back(found->second);
  }
  std::vector<SystematicShift> out = shifts.shifts;
  for (SystematicShift& one : out) one.shift = one.shift(order).eval();
  return out;
}

}  // namespace thirdrung
