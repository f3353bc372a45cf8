#include "ladder/host_distances.h"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <stdexcept>

#include "base/error.h"
#include "ladder/host_covariance.h"

namespace thirdrung {

namespace {

/// From the nearest galaxies to beyond any calibrator [mag].
constexpr double smallest_modulus = 15.0, largest_modulus = 45.0;
/// Errors in the table may be rounded versions of those in the covariance [mag], or this fraction of them.
constexpr double rounding = 1e-3, relative_rounding = 0.02;

struct Columns {
  std::vector<std::string> supernova, host;
  std::vector<double> modulus, error;  ///< Errors empty: not in the table.
};

Columns columns_of(const Table& table, bool needs_error) {
  Columns out;
  out.supernova = table.strings("supernova");
  out.host = table.has("host") ? table.strings("host") : out.supernova;
  for (std::size_t i = 0; i < out.host.size(); ++i) {
    if (out.host[i].empty()) out.host[i] = out.supernova[i];
  }
  out.modulus = table.reals_in("distance_modulus", "mag");
  if (needs_error || table.has("distance_modulus_error")) out.error = table.reals_in("distance_modulus_error", "mag");
  return out;
}

void check_row(const Table& table, const Columns& columns, std::size_t i, bool needs_error) {
  const std::string& name = columns.supernova[i];
  if (name.empty()) throw InputError(table.place(i, "supernova"), "the calibrator has no name", "give it");
  for (std::size_t before = 0; before < i; ++before) {
    if (columns.supernova[before] != name) continue;
    throw InputError(table.place(i, "supernova"), fmt::format("{} is listed twice, first in row {}", name, before + 1),
                     "keep one of the rows");
  }
  const double modulus = columns.modulus[i];
  if (std::isnan(modulus)) {
    throw InputError(table.place(i, "distance_modulus"), fmt::format("the calibrator {} has no distance", name),
                     "give the distance modulus of its host, or take the row out");
  }
  if (!(modulus >= smallest_modulus && modulus <= largest_modulus)) {
    throw InputError(table.place(i, "distance_modulus"),
                     fmt::format("the distance modulus of {} is {:g}", name, modulus),
                     fmt::format("give it in mag, between {:g} and {:g}", smallest_modulus, largest_modulus));
  }
  const bool has_error = !columns.error.empty() && !std::isnan(columns.error[i]);
  if ((needs_error && !has_error) || (has_error && !(columns.error[i] > 0 && std::isfinite(columns.error[i])))) {
    throw InputError(table.place(i, "distance_modulus_error"),
                     has_error ? fmt::format("the error of the distance of {} is {:g}", name, columns.error[i])
                               : fmt::format("the distance of {} has no error", name),
                     "give a positive 1 sigma in mag");
  }
}

/// Two rows of one host must say the same about it.
void check_same_host(const Table& table, const Columns& columns, std::size_t i, std::size_t first) {
  const auto differ = [&](const std::vector<double>& values, const char* column, const char* what) {
    if (values.empty() || values[i] == values[first] || (std::isnan(values[i]) && std::isnan(values[first]))) return;
    throw InputError(table.place(i, column),
                     fmt::format("{} of {} is {:g} here and {:g} in row {}", what, columns.host[i], values[i],
                                 values[first], first + 1),
                     "give one host one distance, with one error");
  };
  differ(columns.modulus, "distance_modulus", "the distance modulus");
  differ(columns.error, "distance_modulus_error", "the error of the distance modulus");
}

void check_against_covariance(const Table& table, const Columns& columns, const HostDistances& distances,
                              const std::vector<std::size_t>& rows) {
  for (std::size_t h = 0; h < rows.size() && !columns.error.empty(); ++h) {
    const double stated = columns.error[rows[h]];
    const auto k = static_cast<Eigen::Index>(h);
    const double error = std::sqrt(distances.covariance(k, k));
    if (std::isnan(stated) || std::abs(stated - error) <= std::max(rounding, relative_rounding * error)) continue;
    throw InputError(table.place(rows[h], "distance_modulus_error"),
                     fmt::format("the error of the distance of {} is {:g} mag, and {:.4g} mag in the covariance",
                                 distances.hosts[h], stated, error),
                     "make them agree, or leave the column out");
  }
}

}  // namespace

Eigen::Index CalibratorList::host_of(std::size_t calibrator) const {
  const auto& hosts = distances.hosts;
  const auto found = std::find(hosts.begin(), hosts.end(), calibrators.at(calibrator).host);
  if (found == hosts.end()) throw std::logic_error("a calibrator without its host");
  return found - hosts.begin();
}

CalibratorList read_calibrators(const Table& table, const std::filesystem::path& covariance) {
  const bool needs_error = covariance.empty();
  const Columns columns = columns_of(table, needs_error);
  if (table.rows() == 0)
    throw InputError({table.origin(), std::nullopt, ""}, "has no rows", "give one row a calibrator");
  CalibratorList out;
  std::map<std::string, std::size_t> first;
  std::vector<std::size_t> rows;  // the first of each host
  for (std::size_t i = 0; i < table.rows(); ++i) {
    check_row(table, columns, i, needs_error);
    out.calibrators.push_back({columns.supernova[i], columns.host[i], table.place(i, "supernova")});
    const auto [found, fresh] = first.emplace(columns.host[i], i);
    if (!fresh) {
      check_same_host(table, columns, i, found->second);
      continue;
    }
    rows.push_back(i);
    out.distances.hosts.push_back(columns.host[i]);
  }
  const auto n = static_cast<Eigen::Index>(rows.size());
  out.distances.modulus.resize(n);
  out.distances.covariance = Eigen::MatrixXd::Zero(n, n);
  for (Eigen::Index h = 0; h < n; ++h) {
    const std::size_t row = rows[static_cast<std::size_t>(h)];
    out.distances.modulus(h) = columns.modulus[row];
    if (needs_error) out.distances.covariance(h, h) = columns.error[row] * columns.error[row];
  }
  if (!needs_error) {
    out.distances.covariance = read_host_covariance(covariance, out.distances.hosts);
    check_against_covariance(table, columns, out.distances, rows);
  }
  return out;
}

CalibratorList some_of(const CalibratorList& list, const std::vector<bool>& keep) {
  CalibratorList out;
  std::vector<bool> keep_host(list.distances.hosts.size(), false);
  for (std::size_t i = 0; i < list.calibrators.size(); ++i) {
    if (!keep[i]) continue;
    out.calibrators.push_back(list.calibrators[i]);
    keep_host[static_cast<std::size_t>(list.host_of(i))] = true;
  }
  std::vector<Eigen::Index> places;
  for (std::size_t h = 0; h < keep_host.size(); ++h) {
    if (!keep_host[h]) continue;
    places.push_back(static_cast<Eigen::Index>(h));
    out.distances.hosts.push_back(list.distances.hosts[h]);
  }
  out.distances.modulus = list.distances.modulus(places);
  out.distances.covariance = list.distances.covariance(places, places);
  return out;
}

}  // namespace thirdrung
