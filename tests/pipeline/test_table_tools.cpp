#include <array>
#include <catch2/catch.hpp>
#include <cmath>

#include "pipeline/table_tools.h"

using namespace thirdrung;

namespace {

Table small(const std::vector<std::string>& names, const std::vector<double>& values) {
  Table table;
  table.add_strings("name", names).add_reals("value", values, "mag", "of something");
  return table;
}

}  // namespace

TEST_CASE("tables are stacked with units, and tables without rows add nothing") {
  Column missing{"value", "mag", "", Column::Reals{NAN}, {true}};
  Table holes;
  holes.add_strings("name", {"c"}).add(missing);
  const std::array<Table, 4> tables = {Table(), small({"a", "b"}, {1, 2}), small({}, {}), holes};
  const Table all = stacked(tables);
  CHECK(all.strings("name") == std::vector<std::string>{"a", "b", "c"});
  CHECK(all.column("value").unit == "mag");
  CHECK(all.column("value").is_missing(2));
  CHECK_FALSE(all.column("value").is_missing(1));
}

TEST_CASE("rows are chosen") {
  const Table some = rows_of(small({"a", "b", "c"}, {1, 2, 3}), {true, false, true});
  CHECK(some.strings("name") == std::vector<std::string>{"a", "c"});
  CHECK(some.reals("value") == std::vector<double>{1, 3});
}

TEST_CASE("lists are taken apart and put together") {
  CHECK(split_list("a,b,,c", ",") == std::vector<std::string>{"a", "b", "c"});
  CHECK(split_list("", ",").empty());
  CHECK(joined_list(std::vector<std::string>{"a", "b"}, "; ") == "a; b");
}
