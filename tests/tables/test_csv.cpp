#include <catch2/catch.hpp>
#include <cmath>

#include "tables/csv.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using thirdrung::testing::message_of;

namespace {

std::string fault(const std::string& text) {
  return message_of<InputError>([&] { parse_csv(text, "t.csv"); });
}

}  // namespace

TEST_CASE("plain CSV takes types from its fields and units from its names") {
  const Table table = parse_csv(
      "# a remark\nsupernova,mjd,flux,flux_error,used,comment\n1999,53000,1.5,,True,x\n2000,53001.5,-2,0.1,False,1\n",
      "t");
  CHECK(table.strings("supernova") == std::vector<std::string>{"1999", "2000"});
  CHECK(table.column("mjd").unit == "d");
  CHECK(table.reals_in("flux", "nJy") == std::vector<double>{1500, -2000});
  CHECK(table.column("flux_error").unit == "uJy");
  CHECK(std::isnan(table.reals("flux_error")[0]));
  CHECK(table.column("flux_error").is_missing(0));
  CHECK(table.flags("used") == std::vector<bool>{true, false});
  CHECK(table.strings("comment") == std::vector<std::string>{"x", "1"});
}

TEST_CASE("tabs and semicolons delimit where there is no comma") {
  CHECK(parse_csv("a\tb\n1\t2\n", "t").integers("b") == std::vector<std::int64_t>{2});
  CHECK(parse_csv("a;b\n1;2\n", "t").integers("b") == std::vector<std::int64_t>{2});
}

TEST_CASE("what is wrong in plain CSV is said") {
  CHECK(fault("") == "t.csv: is empty; give a line of column names and one line a row.");
  CHECK(
      fault("1.5,2\n3,4\n") ==
      "t.csv: the first line names no columns (it holds the number 1.5); put a line of column names before the rows.");
  CHECK(fault("a,b,a\n") == "t.csv: two columns are named \"a\"; rename one.");
  CHECK(fault("a,,b\n") == "t.csv: column 2 has no name; name every column in the first line.");
  CHECK(fault("a,b\n1,2\n1,2,3\n") ==
        "t.csv, row 2: line 3 has 3 fields where the first line names 2 columns; give every column one field, empty if "
        "the value is missing.");
  const Table table = parse_csv("a,mjd\nx,53000\ny,53o01\n", "t.csv");
  CHECK(message_of<InputError>([&] { table.reals_in("mjd", "d"); }) ==
        "t.csv, row 2, column mjd: \"53o01\" is not a number; give a number, or leave the field empty.");
}

TEST_CASE("plain CSV is written in the units that its names stand for") {
  Table table("t");
  table.add_strings("supernova", {"a,b", "c"});
  table.add_reals("flux", {1.5, 2.5}, "mJy");
  table.add({"mag", "mag", "", Column::Reals{0.1, 0}, {false, true}});
  CHECK(format_csv(table) == "supernova,flux,mag\n\"a,b\",1500.0,0.1\nc,2500.0,\n");
}

TEST_CASE("an error stays one line whatever the file holds") {
  CHECK(fault("a,\"b\nc\"\n1,2\n") ==
        "t.csv: the name of column 2 holds a line break or a control character; give it a name on one line.");
  const Table table = parse_csv("a,mjd\n1,\"two\nlines\"\n", "t.csv");
  CHECK(message_of<InputError>([&] { table.reals("mjd"); }) ==
        "t.csv, row 1, column mjd: \"two lines\" is not a number; give a number, or leave the field empty.");
}
