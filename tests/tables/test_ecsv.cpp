#include <catch2/catch.hpp>
#include <chrono>
#include <cmath>
#include <limits>

#include "tables/ecsv.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using thirdrung::testing::message_of;

namespace {

const std::string kHeader =
    "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: supernova, datatype: string}\n"
    "# - {name: mjd, unit: d, datatype: float64, format: .2f, description: 'of the middle'}\n"
    "# - {name: n, datatype: int16}\n# delimiter: ','\n# meta: !!omap\n"
    "# - {source: 'someone, somewhere'}\n# - {note: two}\n# schema: astropy-2.0\n";

Table parse(const std::string& rows) {
  return parse_ecsv(kHeader + "supernova,mjd,n\n" + rows, "t.ecsv");
}
std::string fault(const std::string& text) {
  return message_of<InputError>([&] { parse_ecsv(text, "t.ecsv"); });
}
std::string fault_in_rows(const std::string& rows) {
  return fault(kHeader + "supernova,mjd,n\n" + rows);
}

}  // namespace

TEST_CASE("an ECSV file is read with its header") {
  const Table table = parse("a,53000.5,1\n\"b, \"\"c\"\"\nd\",nan,\n,,-3\n");
  REQUIRE(table.rows() == 3);
  CHECK(table.origin() == "t.ecsv");
  CHECK(table.strings("supernova") == std::vector<std::string>{"a", "b, \"c\"\nd", ""});
  CHECK(table.column("mjd").unit == "d");
  CHECK(table.column("mjd").description == "of the middle");
  CHECK(std::isnan(table.reals("mjd")[1]));
  CHECK_FALSE(table.column("mjd").is_missing(1));
  CHECK(table.column("mjd").is_missing(2));
  CHECK(table.column("supernova").is_missing(2));
  CHECK(table.integers("n") == std::vector<std::int64_t>{1, 0, -3});
  CHECK(table.column("n").is_missing(1));
  CHECK(table.meta("source") == "someone, somewhere");
  CHECK(table.meta("note") == "two");
}

TEST_CASE("line ends of other systems, blank lines and comments among the rows do no harm") {
  std::string text = kHeader + "supernova,mjd,n\na,1.5,1\n\n# a remark\nb,2.5,2";
  CHECK(parse_ecsv(text, "t").rows() == 2);
  std::string windows;
  for (const char c : text) windows += c == '\n' ? std::string("\r\n") : std::string(1, c);
  CHECK(parse_ecsv(windows, "t").strings("supernova") == std::vector<std::string>{"a", "b"});
}

TEST_CASE("what is wrong in an ECSV file is said with row and column") {
  CHECK(fault_in_rows("a,1,1\nb,1.5.2,1\n") ==
        "t.ecsv, row 2, column mjd: \"1.5.2\" is not a number; give a number, or leave the field empty.");
  CHECK(fault_in_rows("a,1,40000\n") ==
        "t.ecsv, row 1, column n: \"40000\" is not a whole number of type int16; give a whole number of type int16, or "
        "leave the field empty.");
  CHECK(fault_in_rows("a,1\n") ==
        "t.ecsv, row 1: line 13 has 2 fields where the header names 3 columns; give every column one field, empty if "
        "the value is missing.");
  CHECK(fault_in_rows("a,1,1\n\"b,1,1\n") ==
        "t.ecsv: line 14: a quote is opened and never closed; close it, or double a quote that is part of the text.");
  CHECK(
      fault_in_rows("\"a\"b,1,1\n") ==
      "t.ecsv: line 13: something stands behind the closing quote of \"a\"; double a quote that is part of the text.");
}

TEST_CASE("what is wrong in an ECSV header is said") {
  CHECK(fault("supernova,mjd\n") ==
        "t.ecsv: the first line is not \"# %ECSV 1.0\"; give an ECSV file, or name a plain table .csv.");
  CHECK(fault(kHeader + "supernova,n,mjd\n") ==
        "t.ecsv: the line of column names (supernova, n, mjd) differs from the header's \"datatype\" (supernova, mjd, "
        "n); make them agree, in the same order.");
  CHECK(fault(kHeader) == "t.ecsv: ends before the line of column names; give the whole file.");
  CHECK(
      fault(
          "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: float64}\n# - {name: a, datatype: int8}\na a\n") ==
      "t.ecsv: two columns are named \"a\"; rename one.");
  CHECK(fault("# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: complex128}\na\n") ==
        "t.ecsv, column a: its datatype \"complex128\" is not read here; use float64, int64, bool or string.");
  CHECK(fault("# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: string, subtype: 'float64[3]'}\na\n") ==
        "t.ecsv, column a: holds arrays or objects (subtype float64[3]); give one number or text a cell, in several "
        "columns or rows if need be.");
  CHECK(fault("# %ECSV 1.0\n# ---\n# datatype: [\na\n").starts_with("t.ecsv: line 4: the header is not valid YAML ("));
  CHECK(fault("# %ECSV 1.0\n# ---\n# meta: {}\na\n") ==
        "t.ecsv: the header has no list \"datatype\"; list every column there with name and datatype.");
  CHECK(fault("# %ECSV 2.0\n# ---\n") ==
        "t.ecsv: is of a version of ECSV that is not read here; write it as ECSV 1.0.");
}

TEST_CASE("a table survives being written and read, in every type and both delimiters") {
  Table table("t");
  const double inf = std::numeric_limits<double>::infinity();
  table.add({"x",
             "km / s",
             "a: \"b\" # c",
             Column::Reals{0.1, 1.0 / 3, -inf, 5e-324, 0},
             {false, false, false, false, true}});
  table.add(
      {"text", "", "", Column::Strings{"a,b", " \"q\" ", "#", "two\nlines", ""}, {false, false, false, false, true}});
  table.add({"whole",
             "",
             "",
             Column::Integers{1, -2, std::numeric_limits<std::int64_t>::min(), 4, 0},
             {false, false, false, false, true}});
  table.add({"kept", "", "", Column::Flags{true, false, true, true, false}, {false, false, false, false, true}});
  table.set_meta("source", "line one\nline two\t\"quoted\" \\ λ");
  for (const char delimiter : {',', ' '}) {
    const Table read = parse_ecsv(format_ecsv(table, delimiter), "t");
    REQUIRE(read.columns().size() == table.columns().size());
    for (std::size_t i = 0; i < 4; ++i) {
      const Column& want = table.columns()[i];
      const Column& got = read.columns()[i];
      CAPTURE(want.name, delimiter);
      CHECK(got.name == want.name);
      CHECK(got.unit == want.unit);
      CHECK(got.description == want.description);
      CHECK(got.missing == want.missing);
      CHECK(read.strings(want.name) == table.strings(want.name));
      CHECK(got.values.index() == want.values.index());
    }
    CHECK(read.meta() == table.meta());
  }
}

TEST_CASE("an empty text that is not missing stays so") {
  Table table;
  table.add_strings("a", {"", "x"});
  table.add_reals("b", {1, 2});
  CHECK(parse_ecsv(format_ecsv(table), "t").column("a").missing.empty());
}

// The goal is well under 0.1 s for a table of this size; the margin is for slow and busy machines.
TEST_CASE("a table of 30000 rows is read quickly") {
  std::string rows;
  for (int i = 0; i < 30000; ++i) rows += fmt::format("supernova-{},{:.4f},{}\n", i % 300, 53000 + 0.1 * i, i % 30000);
  const std::string text = kHeader + "supernova,mjd,n\n" + rows;
  const auto start = std::chrono::steady_clock::now();
  CHECK(parse_ecsv(text, "t").rows() == 30000);
  const std::chrono::duration<double> elapsed = std::chrono::steady_clock::now() - start;
  CAPTURE(elapsed.count());
  CHECK(elapsed.count() < 1.0);
}
