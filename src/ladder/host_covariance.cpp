#include "ladder/host_covariance.h"

#include <fmt/format.h>

#include <Eigen/Eigenvalues>
#include <algorithm>
#include <cmath>
#include <map>

#include "base/error.h"
#include "tables/fits_image.h"
#include "tables/read_write.h"
#include "tables/units.h"

namespace thirdrung {

namespace {

/// The matrix as its file has it.
struct NamedMatrix {
  std::string file;
  std::vector<std::string> hosts;
  Eigen::MatrixXd values;
};

bool is_fits(const std::filesystem::path& path) {
  const std::string name = path.filename().string();
  return name.ends_with(".fits") || name.ends_with(".fits.gz");
}

NamedMatrix from_fits(const std::filesystem::path& path) {
  const FitsReader reader(path);
  NamedMatrix out;
  out.file = reader.file();
  out.hosts = reader.table("hosts").strings("host");
  const FitsImage image = reader.image("covariance");
  const Place place{out.file, std::nullopt, "covariance"};
  const std::size_t n = out.hosts.size();
  if (image.shape != std::vector<std::size_t>{n, n}) {
    std::string shape;
    for (const std::size_t length : image.shape) shape += (shape.empty() ? "" : " by ") + std::to_string(length);
    throw InputError(place, fmt::format("the covariance is {} for {} hosts in the table beside it", shape, n),
                     "give one row and one column a host");
  }
  const double factor = conversion_factor(image.unit, "mag2", place);
  out.values = factor * Eigen::Map<const Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>>(
                            image.values.data(), static_cast<Eigen::Index>(n), static_cast<Eigen::Index>(n));
  return out;
}

NamedMatrix from_table(const std::filesystem::path& path) {
  const Table table = read_table(path);
  NamedMatrix out;
  out.file = table.origin();
  out.hosts = table.strings("host");
  const auto n = static_cast<Eigen::Index>(out.hosts.size());
  if (table.columns().size() != out.hosts.size() + 1) {
    throw InputError(
        {out.file, std::nullopt, ""},
        fmt::format("the covariance has {} rows and {} columns besides host", n, table.columns().size() - 1),
        "give one row and one column a host");
  }
  out.values.resize(n, n);
  for (Eigen::Index j = 0; j < n; ++j) {
    const auto column = table.reals_in(out.hosts[static_cast<std::size_t>(j)], "mag2");
    out.values.col(j) = Eigen::Map<const Eigen::VectorXd>(column.data(), n);
  }
  return out;
}

std::string first_few(const std::vector<std::string>& names) {
  constexpr std::size_t most = 5;
  std::string list;
  for (std::size_t i = 0; i < std::min(most, names.size()); ++i) list += (list.empty() ? "" : ", ") + names[i];
  return names.size() > most ? fmt::format("{} and {} more", list, names.size() - most) : list;
}

/// Those of `names` that `others` lacks.
std::vector<std::string> lacking(const std::vector<std::string>& names, const std::vector<std::string>& others) {
  std::vector<std::string> out;
  for (const std::string& name : names) {
    if (std::find(others.begin(), others.end(), name) == others.end()) out.push_back(name);
  }
  return out;
}

void check_hosts(const NamedMatrix& matrix, const std::vector<std::string>& hosts) {
  const Place place{matrix.file, std::nullopt, "host"};
  std::map<std::string, std::size_t> first;
  for (std::size_t i = 0; i < matrix.hosts.size(); ++i) {
    const auto [found, fresh] = first.emplace(matrix.hosts[i], i);
    if (fresh) continue;
    throw InputError({matrix.file, i + 1, "host"},
                     fmt::format("{} is named twice, first in row {}", matrix.hosts[i], found->second + 1),
                     "keep one row and column of it");
  }
  if (const auto absent = lacking(hosts, matrix.hosts); !absent.empty()) {
    throw InputError(place, fmt::format("the covariance lacks {}, which the calibrators have", first_few(absent)),
                     "give it a row and a column for every host of the calibrators, under the same name");
  }
  if (const auto extra = lacking(matrix.hosts, hosts); !extra.empty()) {
    throw InputError(place, fmt::format("the covariance has {}, which no calibrator is in", first_few(extra)),
                     "take its row and column out, or add its calibrator");
  }
}

void check_values(const NamedMatrix& matrix) {
  const Eigen::MatrixXd& c = matrix.values;
  const auto host = [&](Eigen::Index i) { return matrix.hosts[static_cast<std::size_t>(i)]; };
  const auto cell = [&](Eigen::Index i, Eigen::Index j) {
    return Place{matrix.file, static_cast<std::size_t>(i) + 1, host(j)};
  };
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    for (Eigen::Index j = 0; j < c.cols(); ++j) {
      if (!std::isfinite(c(i, j)))
        throw InputError(cell(i, j), fmt::format("the covariance of {} and {} is not a number", host(i), host(j)),
                         "give every one in mag2");
    }
    if (!(c(i, i) > 0))
      throw InputError(cell(i, i), fmt::format("the variance of {} is {:g}", host(i), c(i, i)),
                       "give the square of its error in mag2");
  }
  for (Eigen::Index i = 0; i < c.rows(); ++i) {
    for (Eigen::Index j = 0; j < i; ++j) {
      if (std::abs(c(i, j) - c(j, i)) <= 1e-6 * std::sqrt(c(i, i) * c(j, j))) continue;
      throw InputError(cell(i, j),
                       fmt::format("the covariance is not symmetric: {:g} for {} and {}, and {:g} the other way round",
                                   c(i, j), host(i), host(j), c(j, i)),
                       "give both the same value");
    }
  }
}

/// The correlations are looked at, so that hosts with large errors do not hide the others.
void check_positive_definite(const NamedMatrix& matrix) {
  const Eigen::VectorXd scale = matrix.values.diagonal().cwiseSqrt().cwiseInverse();
  const Eigen::MatrixXd correlation = scale.asDiagonal() * matrix.values * scale.asDiagonal();
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> eigen(0.5 * (correlation + correlation.transpose()));
  if (eigen.eigenvalues()[0] > 1e-10) return;
  const Eigen::VectorXd direction = eigen.eigenvectors().col(0).cwiseAbs();
  std::vector<std::string> guilty;
  for (Eigen::Index i = 0; i < direction.size(); ++i) {
    if (direction[i] > 0.5 * direction.maxCoeff()) guilty.push_back(matrix.hosts[static_cast<std::size_t>(i)]);
  }
  throw InputError({matrix.file, std::nullopt, "covariance"},
                   fmt::format("the covariance is not positive definite: its correlations of {} contradict each other "
                               "(smallest eigenvalue {:.3g})",
                               first_few(guilty), eigen.eigenvalues()[0]),
                   "check these rows and columns");
}

}  // namespace

Eigen::MatrixXd read_host_covariance(const std::filesystem::path& path, const std::vector<std::string>& hosts) {
  const NamedMatrix matrix = is_fits(path) ? from_fits(path) : from_table(path);
  check_hosts(matrix, hosts);
  check_values(matrix);
  check_positive_definite(matrix);
  std::vector<Eigen::Index> places;
  places.reserve(hosts.size());
  for (const std::string& host : hosts)
    places.push_back(std::find(matrix.hosts.begin(), matrix.hosts.end(), host) - matrix.hosts.begin());
  const Eigen::MatrixXd ordered = matrix.values(places, places);
  return 0.5 * (ordered + ordered.transpose());
}

}  // namespace thirdrung
