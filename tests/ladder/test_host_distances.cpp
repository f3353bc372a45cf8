#include <catch2/catch.hpp>
#include <string>

#include "base/error.h"
#include "ladder/host_covariance.h"
#include "ladder/host_distances.h"
#include "tables/fits_image.h"
#include "tables/read_write.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;

namespace {

Table calibrators(const std::vector<std::string>& names, const std::vector<std::string>& hosts,
                  const std::vector<double>& moduli, const std::vector<double>& errors = {}) {
  Table table("hosts.ecsv");
  table.add_strings("supernova", names).add_strings("host", hosts).add_reals("distance_modulus", moduli, "mag");
  if (!errors.empty()) table.add_reals("distance_modulus_error", errors, "mag");
  return table;
}

/// The message that reading gives, "" if it gives none.
std::string fault(const Table& table, const std::filesystem::path& covariance = {}) {
  try {
    read_calibrators(table, covariance);
  } catch (const InputError& error) {
    return error.what();
  }
  return "";
}

std::filesystem::path covariance_fits(const testing::ScratchFolder& folder, const std::vector<std::string>& hosts,
                                      const std::vector<double>& values, const std::string& unit = "mag2") {
  Table table;
  table.add_strings("host", hosts);
  FitsWriter writer;
  writer.add_image("covariance", {values.size() / hosts.size(), hosts.size()}, values, unit);
  writer.add_table(table, "hosts");
  auto path = folder.path() / "covariance.fits";
  writer.write(path);
  return path;
}

void check_words(const std::string& message, std::initializer_list<const char*> words) {
  INFO(message);
  for (const char* word : words) {
    INFO(word);
    CHECK(message.find(word) != std::string::npos);
  }
}

}  // namespace

TEST_CASE("calibrators of one host share its distance") {
  const CalibratorList list =
      read_calibrators(calibrators({"a", "b", "c"}, {"Elm", "Oak", "Elm"}, {30.0, 31.0, 30.0}, {0.1, 0.2, 0.1}));
  CHECK(list.distances.hosts == std::vector<std::string>{"Elm", "Oak"});
  CHECK(list.host_of(2) == 0);
  CHECK(list.distances.covariance(0, 0) == Approx(0.01));
  CHECK(list.distances.covariance(0, 1) == 0.0);
  const CalibratorList some = some_of(list, {false, true, false});
  CHECK(some.distances.hosts == std::vector<std::string>{"Oak"});
  CHECK(some.distances.modulus(0) == 31.0);
  CHECK(some.distances.covariance(0, 0) == Approx(0.04));
}

TEST_CASE("a host without a name is that of its supernova alone") {
  const CalibratorList list = read_calibrators(calibrators({"a", "b"}, {"", ""}, {30.0, 31.0}, {0.1, 0.2}));
  CHECK(list.distances.hosts == std::vector<std::string>{"a", "b"});
}

TEST_CASE("a table of calibrators with a fault is refused in a sentence") {
  const double absent = std::numeric_limits<double>::quiet_NaN();
  check_words(fault(calibrators({"a", "a"}, {"Elm", "Oak"}, {30, 31}, {0.1, 0.1})),
              {"hosts.ecsv", "row 2", "column supernova", "a is listed twice"});
  check_words(fault(calibrators({"a", "b"}, {"Elm", "Oak"}, {30, absent}, {0.1, 0.1})),
              {"row 2", "column distance_modulus", "b has no distance"});
  check_words(fault(calibrators({"a"}, {"Elm"}, {3.1}, {0.1})), {"row 1", "distance_modulus", "3.1", "between 15"});
  check_words(fault(calibrators({"a"}, {"Elm"}, {30}, {absent})), {"distance_modulus_error", "has no error"});
  check_words(fault(calibrators({"a"}, {"Elm"}, {30}, {-0.1})), {"distance_modulus_error", "-0.1"});
  check_words(fault(calibrators({"a"}, {"Elm"}, {30})), {"hosts.ecsv", "distance_modulus_error"});
  check_words(fault(calibrators({"a", "b"}, {"Elm", "Elm"}, {30, 30.1}, {0.1, 0.1})),
              {"row 2", "Elm", "30.1", "30", "row 1"});
  check_words(fault(calibrators({"a", "b"}, {"Elm", "Elm"}, {30, 30}, {0.1, 0.2})),
              {"row 2", "distance_modulus_error", "Elm"});
}

TEST_CASE("the covariance of the hosts is read from FITS and from a table, in any order") {
  const testing::ScratchFolder folder;
  const Table table = calibrators({"a", "b"}, {"Elm", "Oak"}, {30, 31});
  const CalibratorList list =
      read_calibrators(table, covariance_fits(folder, {"Oak", "Elm"}, {0.04, 0.01, 0.01, 0.02}));
  CHECK(list.distances.covariance(0, 0) == 0.02);
  CHECK(list.distances.covariance(1, 1) == 0.04);
  CHECK(list.distances.covariance(0, 1) == 0.01);

  Table matrix;
  matrix.add_strings("host", {"Oak", "Elm"});
  matrix.add_reals("Oak", {0.04, 0.01}, "mag2").add_reals("Elm", {0.01, 0.02}, "mag2");
  const auto path = folder.path() / "covariance.ecsv";
  write_table(matrix, path);
  CHECK(read_host_covariance(path, {"Elm", "Oak"}) == list.distances.covariance);
}

TEST_CASE("a covariance of the hosts with a fault is refused in a sentence") {
  const testing::ScratchFolder folder;
  const Table table = calibrators({"a", "b"}, {"Elm", "Oak"}, {30, 31});
  const auto of = [&](const std::vector<std::string>& hosts, const std::vector<double>& values,
                      const std::string& unit = "mag2") {
    return fault(table, covariance_fits(folder, hosts, values, unit));
  };
  CHECK(of({"Elm", "Oak"}, {0.02, 0.01, 0.01, 0.04}).empty());
  check_words(of({"Elm", "Oak"}, {0.02, 0.01, 0.02, 0.04}),
              {"covariance.fits", "row 2", "column Elm", "not symmetric", "Oak", "0.02", "0.01"});
  check_words(of({"Elm", "Oak"}, {0.02, 0.05, 0.05, 0.04}), {"not positive definite", "Elm, Oak"});
  check_words(of({"Elm", "Oak"}, {-0.02, 0, 0, 0.04}), {"row 1", "column Elm", "variance of Elm", "-0.02"});
  check_words(of({"Elm", "Oak"}, {0.02, 0, 0, 0.04, 0, 0}), {"3 by 2", "2 hosts"});
  check_words(of({"Elm", "Ash"}, {0.02, 0, 0, 0.04}), {"lacks Oak"});
  check_words(of({"Elm", "Oak", "Ash"}, {1, 0, 0, 0, 1, 0, 0, 0, 1}), {"has Ash", "no calibrator"});
  check_words(of({"Elm", "Elm"}, {0.02, 0, 0, 0.04}), {"row 2", "Elm is named twice"});
  check_words(of({"Elm", "Oak"}, {0.02, 0, 0, 0.04}, "mag"), {"covariance", "mag"});

  const Table stated = calibrators({"a", "b"}, {"Elm", "Oak"}, {30, 31}, {0.1, 0.2});
  const auto file = covariance_fits(folder, {"Elm", "Oak"}, {0.04, 0, 0, 0.04});
  check_words(fault(stated, file), {"row 1", "distance_modulus_error", "Elm", "0.1", "0.2", "agree"});
}
