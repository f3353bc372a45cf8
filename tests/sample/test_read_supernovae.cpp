#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>

#include "base/error.h"
#include "real_data.h"
#include "sample/read_supernovae.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

constexpr double nan_value = missing_value;

Table small_table() {
  Table table("hosts.ecsv");
  table.add_strings("supernova", {"sn-a", "sn-b", "sn-c"});
  table.add_reals("ra", {10.0, 20.0, 30.0}, "deg");
  table.add_reals("dec", {-10.0, 0.0, 45.0}, "deg");
  table.add_reals("z_helio", {0.03, 0.05, 0.07});
  return table;
}

/// The small table with one value of one real column replaced.
Table with(const std::string& column, const std::string& unit, std::size_t row, double value) {
  Table table("hosts.ecsv");
  const Table good = small_table();
  for (const Column& c : good.columns()) {
    Column copy = c;
    if (c.name == column) std::get<Column::Reals>(copy.values)[row] = value;
    table.add(copy);
  }
  if (!good.has(column)) {
    std::vector<double> values(3, nan_value);
    values[row] = value;
    table.add_reals(column, values, unit);
  }
  return table;
}

void one_is_set_aside(const Table& table, const std::string& reason) {
  const SupernovaList list = read_supernovae(table, "north");
  INFO(reason);
  REQUIRE(list.set_aside.size() == 1);
  CHECK(list.supernovae.size() == 2);
  CHECK(list.set_aside[0].supernova == "sn-b");
  CHECK(list.set_aside[0].survey == "north");
  CHECK_THAT(list.set_aside[0].reason, Catch::Contains(reason) && Catch::Contains("hosts.ecsv, row 2"));
}

}  // namespace

TEST_CASE("a plain table of supernovae is read, absent columns missing") {
  const SupernovaList list = read_supernovae(small_table(), "north");
  REQUIRE(list.supernovae.size() == 3);
  CHECK(list.set_aside.empty());
  CHECK(list.supernovae[2].name == "sn-c");
  CHECK(list.supernovae[2].z_helio == 0.07);
  CHECK(list.supernovae[2].place.row == 3U);
  CHECK(std::isnan(list.supernovae[0].host_log_mass));
}

TEST_CASE("a single bad supernova is set aside with its reason") {
  one_is_set_aside(with("z_helio", "", 1, nan_value), "z_helio is missing");
  one_is_set_aside(with("z_helio", "", 1, 0.0), "z_helio is 0");
  one_is_set_aside(with("z_helio", "", 1, -0.01), "z_helio is -0.01");
  one_is_set_aside(with("z_helio", "", 1, 5.2), "above 3");
  one_is_set_aside(with("ra", "deg", 1, nan_value), "ra is missing");
  one_is_set_aside(with("dec", "deg", 1, -95.0), "no place in the sky");
  one_is_set_aside(with("z_helio_error", "", 1, -1e-4), "z_helio_error is -0.0001");
  one_is_set_aside(with("z_group", "", 1, -0.03), "z_group is -0.03");
  one_is_set_aside(with("v_pec", "km / s", 1, 9000.0), "v_pec is 9000");
  one_is_set_aside(with("mw_ebv", "mag", 1, -0.02), "mw_ebv is -0.02");
  one_is_set_aside(with("host_log_mass", "dex(solMass)", 1, -9.0), "host_log_mass is -9");
}

TEST_CASE("a supernova listed twice counts once") {
  Table table("hosts.ecsv");
  table.add_strings("supernova", {"sn-a", "sn-a", ""});
  table.add_reals("ra", {10.0, 20.0, 30.0}, "deg");
  table.add_reals("dec", {-10.0, 0.0, 45.0}, "deg");
  table.add_reals("z_helio", {0.03, 0.05, 0.07});
  const SupernovaList list = read_supernovae(table, "north");
  REQUIRE(list.supernovae.size() == 1);
  CHECK(list.supernovae[0].z_helio == 0.03);
  CHECK_THAT(list.set_aside.at(0).reason, Catch::Contains("listed twice: row 1 is kept"));
  CHECK_THAT(list.set_aside.at(1).reason, Catch::Contains("no name"));
}

TEST_CASE("units are converted") {
  const SupernovaList list = read_supernovae(with("v_pec", "m / s", 1, 250000.0), "north");
  CHECK(list.supernovae.at(1).v_pec == Approx(250.0));
}

TEST_CASE("faults of the whole table stop the run") {
  Table no_redshift("hosts.ecsv");
  no_redshift.add_strings("supernova", {"sn-a"});
  no_redshift.add_reals("ra", {10.0}, "deg");
  no_redshift.add_reals("dec", {10.0}, "deg");
  CHECK_THROWS_WITH(read_supernovae(no_redshift, "north"), Catch::Contains("z_helio"));
  CHECK_THROWS_AS(read_supernovae(with("v_pec", "mag", 1, 250.0), "north"), InputError);
  Table no_unit("hosts.ecsv");
  no_unit.add_strings("supernova", {"sn-a"});
  no_unit.add_reals("ra", {10.0});
  no_unit.add_reals("dec", {10.0}, "deg");
  no_unit.add_reals("z_helio", {0.03});
  CHECK_THROWS_WITH(read_supernovae(no_unit, "north"), Catch::Contains("ra"));
  Table empty("hosts.ecsv");
  empty.add_strings("supernova", {});
  empty.add_reals("ra", {}, "deg");
  empty.add_reals("dec", {}, "deg");
  empty.add_reals("z_helio", {});
  CHECK_THROWS_WITH(read_supernovae(empty, "north"), Catch::Contains("no rows"));
}

TEST_CASE("every published table of supernovae reads without loss", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  std::size_t total = 0;
  for (const auto& entry : std::filesystem::directory_iterator(data / "supernovae")) {
    const Table table = read_table(entry.path());
    const SupernovaList list = read_supernovae(table, entry.path().stem().string());
    INFO(entry.path().filename());
    for (const SetAside& s : list.set_aside) WARN(s.reason);
    CHECK(list.supernovae.size() == table.rows());
    total += list.supernovae.size();
  }
  CHECK(total >= 1054);
}
