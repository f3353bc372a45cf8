#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "tables/cells.h"
#include "tables/scratch_folder.h"
#include "tables/table.h"

using namespace thirdrung;
using thirdrung::testing::message_of;

namespace {

Table small_table() {
  Table table("photometry.ecsv");
  table.add_strings("supernova", {"a", "b", ""});
  table.add_reals("flux", {1.5, -2, 3}, "mJy");
  table.add_integers("epochs", {4, 5, 6});
  table.add_flags("used", {true, false, true});
  table.add({"ra", "deg", "", Column::Reals{1, 2, 3}, {false, true, false}});
  table.add_strings("number", {"1", "0", ""});
  return table;
}

}  // namespace

TEST_CASE("a column is read as the type that is asked for") {
  const Table table = small_table();
  CHECK(table.rows() == 3);
  CHECK(table.reals("epochs") == std::vector<double>{4, 5, 6});
  CHECK(table.reals("used") == std::vector<double>{1, 0, 1});
  CHECK(std::isnan(table.reals("ra")[1]));
  CHECK(std::isnan(table.reals("number")[2]));
  CHECK(table.integers("number") == std::vector<std::int64_t>{1, 0, 0});
  CHECK(table.flags("number") == std::vector<bool>{true, false, false});
  CHECK(table.strings("flux") == std::vector<std::string>{"1.5", "-2.0", "3.0"});
  CHECK(table.strings("ra") == std::vector<std::string>{"1.0", "", "3.0"});
  CHECK(table.strings("used") == std::vector<std::string>{"True", "False", "True"});
  CHECK(table.reals_in("flux", "uJy") == std::vector<double>{1500, -2000, 3000});
}

TEST_CASE("errors about a column name file, row and column, and what to do") {
  const Table table = small_table();
  CHECK(message_of<InputError>([&] { table.column("flix"); }) ==
        "photometry.ecsv: there is no column \"flix\"; the nearest name is \"flux\"; rename it or add the column.");
  CHECK(message_of<InputError>([&] { table.reals("supernova"); }) ==
        "photometry.ecsv, row 1, column supernova: \"a\" is not a number; give a number, or leave the field empty.");
  CHECK(message_of<InputError>([&] { table.integers("flux"); }) ==
        "photometry.ecsv, row 1, column flux: 1.5 is not a whole number; give a whole number.");
  CHECK(message_of<InputError>([&] { table.flags("epochs"); }) ==
        "photometry.ecsv, row 1, column epochs: \"4.0\" is neither True nor False; write True or False.");
  CHECK(message_of<InputError>([&] { table.reals_in("epochs", "d"); }) ==
        "photometry.ecsv, column epochs: has no unit; state its unit, \"d\" or one that converts to it.");
  CHECK(message_of<InputError>([&] { table.reals_in("flux", "mag"); }) ==
        "photometry.ecsv, column flux: its unit \"mJy\" is of another kind than \"mag\"; give \"mag\" or a unit that "
        "converts to it.");
}

TEST_CASE("a table keeps its columns of one length and apart by name") {
  Table table = small_table();
  CHECK_THROWS_AS(table.add_reals("flux", {1, 2, 3}), std::logic_error);
  CHECK_THROWS_AS(table.add_reals("new", {1, 2}), std::logic_error);
  CHECK_THROWS_AS(table.add({"new", "", "", Column::Reals{1, 2, 3}, {true}}), std::logic_error);
}

TEST_CASE("remarks keep their order, and a second value replaces the first") {
  Table table;
  table.set_meta("b", "1");
  table.set_meta("a", "2");
  table.set_meta("b", "3");
  REQUIRE(table.meta().size() == 2);
  CHECK(table.meta()[0].first == "b");
  CHECK(table.meta("b") == "3");
  CHECK_FALSE(table.meta("c").has_value());
}

TEST_CASE("numbers are read from text strictly") {
  CHECK(parse_real("+1.5") == 1.5);
  CHECK(parse_real("1e-400") == 0.0);
  CHECK(parse_real("4e-320") == 4e-320);
  CHECK(std::isnan(*parse_real("nan")));
  CHECK(parse_real("-inf") == -std::numeric_limits<double>::infinity());
  for (const char* wrong : {"", "1.5x", "1,5", "1e400", "--1", "+-1", "0x10", "1 2", "."}) {
    CAPTURE(wrong);
    CHECK_FALSE(parse_real(wrong).has_value());
  }
  CHECK(parse_integer("-9223372036854775808") == std::numeric_limits<std::int64_t>::min());
  CHECK_FALSE(parse_integer("9223372036854775808").has_value());
  CHECK_FALSE(parse_integer("1.0").has_value());
}

TEST_CASE("numbers are written with the fewest digits that read back the same") {
  CHECK(format_real(0.1) == "0.1");
  CHECK(format_real(1) == "1.0");
  CHECK(format_real(-0.0) == "-0.0");
  CHECK(format_real(1e-5) == "1e-05");
  CHECK(format_real(1e22) == "1e+22");
  CHECK(format_real(std::numeric_limits<double>::infinity()) == "inf");
  CHECK(format_real(-std::numeric_limits<double>::quiet_NaN()) == "nan");
}
