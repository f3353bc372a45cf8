#include "lightcurve/photometry.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <optional>
#include <set>
#include <tuple>

#include "base/constants.h"
#include "base/text.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace {

/// The measured columns of a table, in the program's units.
struct Columns {
  std::vector<std::string> supernova;
  std::vector<std::string> passband;
  std::vector<double> mjd;
  std::vector<double> value;
  std::vector<double> error;
  bool magnitudes = false;
  std::string value_name;
  std::string error_name;
};

Columns columns_of(const Table& table, const std::optional<std::string>& only_supernova) {
  Columns out;
  const bool has_flux = table.has("flux");
  out.magnitudes = !has_flux && table.has("mag");
  if (has_flux && table.has("mag")) {
    throw InputError(table.place("mag"), "stands beside a column \"flux\"", "keep one of the two with its error");
  }
  out.value_name = out.magnitudes ? "mag" : "flux";
  out.error_name = out.magnitudes ? "mag_error" : "flux_error";
  const std::string unit = out.magnitudes ? "mag" : "uJy";
  out.supernova = only_supernova && !table.has("supernova") ? std::vector<std::string>(table.rows(), *only_supernova)
                                                            : table.strings("supernova");
  out.passband = table.strings("passband");
  out.mjd = table.reals_in("mjd", "d");
  out.value = table.reals_in(out.value_name, unit);
  out.error = table.reals_in(out.error_name, unit);
  return out;
}

/// The bad cell of a row, if there is one.
void check_row(const Table& table, const Columns& columns, std::size_t row, const PassbandCatalogue& catalogue) {
  const auto number = [&](double value) {
    return std::isnan(value) ? std::string("missing") : fmt::format("{}", value);
  };
  if (!std::isfinite(columns.mjd[row])) {
    throw InputError(table.place(row, "mjd"), fmt::format("the date is {}", number(columns.mjd[row])),
                     "give a date or take the row out");
  }
  catalogue.at(columns.passband[row], table.place(row, "passband"));
  if (!std::isfinite(columns.value[row])) {
    throw InputError(table.place(row, columns.value_name), fmt::format("the value is {}", number(columns.value[row])),
                     "give a finite number or take the row out");
  }
  const double error = columns.error[row];
  if (!std::isfinite(error) || error <= 0) {
    throw InputError(table.place(row, columns.error_name), fmt::format("the error is {}", number(error)),
                     "give a positive error or take the row out");
  }
}

Epoch epoch_of(const Columns& columns, std::size_t row, const CalibratedPassband& band) {
  Epoch out;
  out.mjd = columns.mjd[row];
  out.row = row + 1;
  if (columns.magnitudes) {
    out.flux = band.flux_of_magnitude(columns.value[row]);
    out.flux_error = out.flux * constants::ln_flux_per_mag * columns.error[row];
  } else {
    out.flux = band.flux_of_flux(columns.value[row]);
    out.flux_error = band.flux_of_flux(columns.error[row]);
  }
  return out;
}

/// Grows the light curves row by row; shared by all tables of a folder.
class Collector {
 public:
  Collector(const PassbandCatalogue& catalogue, std::string survey)
      : catalogue_(catalogue), survey_(std::move(survey)) {}

  void add(const Table& table, const std::optional<std::string>& only_supernova) {
    const Columns columns = columns_of(table, only_supernova);
    if (table.rows() == 0) throw InputError(table.place(""), "the table has no rows", "give at least one measurement");
    for (std::size_t row = 0; row < table.rows(); ++row) {
      Entry& entry = entry_of(columns.supernova[row]);
      if (!entry.fault) add_row(table, columns, row, entry);
    }
  }

  Photometry finish() {
    Photometry out;
    for (Entry& entry : entries_) {
      if (entry.fault) {
        out.set_aside.push_back({entry.light_curve.supernova, survey_, entry.fault->what()});
      } else {
        out.light_curves.push_back(std::move(entry.light_curve));
      }
    }
    if (out.light_curves.empty() && !entries_.empty()) throw InputError(*entries_.front().fault);
    return out;
  }

 private:
  struct Entry {
    LightCurve light_curve;
    std::optional<InputError> fault;
    std::set<std::tuple<double, std::size_t, double, double>> seen;
  };

  Entry& entry_of(const std::string& supernova) {
    const auto [found, is_new] = index_.try_emplace(supernova, entries_.size());
    if (is_new) {
      entries_.emplace_back();
      entries_.back().light_curve.supernova = supernova;
      entries_.back().light_curve.survey = survey_;
    }
    return entries_[found->second];
  }

  void add_row(const Table& table, const Columns& columns, std::size_t row, Entry& entry) {
    LightCurve& light_curve = entry.light_curve;
    try {
      if (light_curve.supernova.empty()) {
        throw InputError(table.place(row, "supernova"), "the name is missing", "give one or take the row out");
      }
      check_row(table, columns, row, catalogue_);
    } catch (const InputError& fault) {
      entry.fault = fault;
      return;
    }
    const std::string& id = columns.passband[row];
    Epoch epoch = epoch_of(columns, row, catalogue_.at(id));
    auto& ids = light_curve.passbands;
    epoch.passband = static_cast<std::size_t>(std::find(ids.begin(), ids.end(), id) - ids.begin());
    if (!entry.seen.insert({epoch.mjd, epoch.passband, epoch.flux, epoch.flux_error}).second) {
      ++light_curve.repeated_rows;
      return;
    }
    if (epoch.passband == ids.size()) ids.push_back(id);
    light_curve.epochs.push_back(epoch);
  }

  const PassbandCatalogue& catalogue_;
  std::string survey_;
  std::vector<Entry> entries_;
  std::map<std::string, std::size_t> index_;
};

/// Name of a table's file without its ending, or nothing if it is no table.
std::optional<std::string> table_name(const std::filesystem::path& path) {
  const std::string name = path.filename().string();
  for (const std::string ending : {".ecsv", ".csv", ".fits", ".fits.gz"}) {
    if (name.size() > ending.size() && name.ends_with(ending)) return name.substr(0, name.size() - ending.size());
  }
  return std::nullopt;
}

std::vector<std::filesystem::path> tables_in(const std::filesystem::path& folder) {
  std::vector<std::filesystem::path> out;
  for (const auto& entry : std::filesystem::directory_iterator(folder)) {
    if (entry.is_regular_file() && table_name(entry.path())) out.push_back(entry.path());
  }
  std::sort(out.begin(), out.end());
  if (out.empty()) {
    throw InputError({folder.string(), std::nullopt, ""}, "the folder holds no table",
                     "give a folder with .ecsv, .csv, .fits or .fits.gz files");
  }
  return out;
}

}  // namespace

Photometry light_curves_of(const Table& table, const PassbandCatalogue& catalogue, const std::string& survey) {
  Collector collector(catalogue, survey);
  collector.add(table, std::nullopt);
  return collector.finish();
}

Photometry read_photometry(const std::filesystem::path& path, const PassbandCatalogue& catalogue,
                           const std::string& survey) {
  if (!std::filesystem::is_directory(path)) return light_curves_of(read_table(path), catalogue, survey);
  Collector collector(catalogue, survey);
  for (const auto& file : tables_in(path)) {
    collector.add(read_table(file), table_name(file));
  }
  return collector.finish();
}

}  // namespace thirdrung
