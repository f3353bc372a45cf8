#include "pipeline/saved_shifts.h"

#include <span>

#include "base/error.h"
#include "base/text.h"
#include "tables/fits_image.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

constexpr const char* stem = "shift-";

}  // namespace

std::string SavedShifts::key_of(const std::string& identity) const {
  return sha256_of_text(key_ + "\n" + identity);
}

fs::path SavedShifts::file_of(const std::string& key) const {
  return folder_ / (stem + key.substr(0, 16) + ".fits");
}

std::optional<Eigen::VectorXd> SavedShifts::find(const std::string& identity, Eigen::Index supernovae) const {
  const std::string key = key_of(identity);
  const fs::path file = file_of(key);
  std::error_code ignored;
  if (!fs::exists(file, ignored)) return std::nullopt;
  try {
    const FitsReader reader(file);
    const FitsImage image = reader.image("shift");
    if (reader.keyword("key") != key || static_cast<Eigen::Index>(image.values.size()) != supernovae)
      return std::nullopt;
    return Eigen::Map<const Eigen::VectorXd>(image.values.data(), supernovae);
  } catch (const InputError&) {
    return std::nullopt;  // Damaged: found again.
  }
}

void SavedShifts::save(const std::string& identity, const Eigen::VectorXd& shift) const {
  const std::string key = key_of(identity);
  FitsWriter writer;
  writer.add_keyword({"key", key, "of the inputs, settings and the move"});
  writer.add_image("shift", {static_cast<std::size_t>(shift.size())},
                   std::span(shift.data(), static_cast<std::size_t>(shift.size())), "mag",
                   "of every standardised magnitude for +1 sigma");
  writer.write(file_of(key));
}

void SavedShifts::remove_all(const fs::path& folder) {
  std::error_code ignored;
  for (const auto& entry : fs::directory_iterator(folder, ignored)) {
    if (entry.path().filename().string().starts_with(stem)) fs::remove(entry.path(), ignored);
  }
}

}  // namespace thirdrung
