#include <catch2/catch.hpp>
#include <cmath>
#include <limits>
#include <stdexcept>

#include "base/text.h"
#include "tables/fits_image.h"
#include "tables/fits_table.h"
#include "tables/read_write.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using thirdrung::testing::message_of;
using thirdrung::testing::ScratchFolder;

namespace {

Table every_type() {
  Table table;
  const double inf = std::numeric_limits<double>::infinity();
  const std::vector<bool> last = {false, false, true};
  table.add({"x", "km / s", "speed: µ", Column::Reals{0.1, -inf, 5e-324}, {}});
  table.add({"name", "", "", Column::Strings{"a", "λ and more", ""}, last});
  table.add({"whole", "", "", Column::Integers{1, std::numeric_limits<std::int64_t>::min(), 0}, last});
  table.add({"kept", "", "", Column::Flags{true, false, false}, last});
  table.set_meta("source", std::string(200, 'x') + " 'quoted' λ\nand \\u00b5");
  table.set_meta("a_rather_long_key", "text");
  table.set_meta("naxis", "not the real one");
  return table;
}

}  // namespace

TEST_CASE("a table survives FITS, packed or not") {
  const ScratchFolder folder;
  const Table table = every_type();
  for (const char* name : {"t.fits", "t.fits.gz"}) {
    write_table(table, folder / name);
    const Table read = read_table(folder / name);
    REQUIRE(read.columns().size() == 4);
    for (const Column& want : table.columns()) {
      CAPTURE(want.name, name);
      const Column& got = read.column(want.name);
      CHECK(got.values.index() == want.values.index());
      CHECK(got.description == want.description);
      CHECK(read.strings(want.name) == table.strings(want.name));
      CHECK(got.missing == want.missing);
    }
    CHECK(read.column("x").unit == "km s-1");
    CHECK(read.meta("source") == table.meta("source"));
    CHECK(read.meta("a_rather_long_key") == "text");
    CHECK(read.meta("meta_naxis") == "not the real one");
  }
  CHECK(folder.entries() == 2);
}

TEST_CASE("equal tables give equal files") {
  const ScratchFolder folder;
  write_table(every_type(), folder / "a.fits.gz");
  write_table(every_type(), folder / "b.fits.gz");
  CHECK(read_file(folder / "a.fits.gz") == read_file(folder / "b.fits.gz"));
}

TEST_CASE("an empty table survives FITS") {
  const ScratchFolder folder;
  Table table;
  table.add_reals("x", {}, "d");
  table.add_strings("name", {});
  write_table(table, folder / "t.fits");
  CHECK(read_table(folder / "t.fits").rows() == 0);
  CHECK(read_table(folder / "t.fits").columns().size() == 2);
}

TEST_CASE("arrays, tables and keywords share a file") {
  const ScratchFolder folder;
  std::vector<double> values(24);
  for (std::size_t i = 0; i < values.size(); ++i) values[i] = 0.1 * static_cast<double>(i);
  values[5] = std::numeric_limits<double>::quiet_NaN();
  FitsWriter writer;
  writer.add_keywords({{"revision", std::int64_t{3}, "of the layout"}, {"scale", 0.1, ""}, {"exact", true, ""}});
  writer.add_image("surface", {2, 3, 4}, values, "mag", "phase, wavelength", false,
                   {{"axis_names", std::string("p q"), ""}});
  writer.add_image("rough", {24}, values, "", "", true);
  writer.add_table(every_type(), "rows");
  writer.add_keyword({"late", std::string("still in the first header"), ""});
  CHECK_THROWS_AS(writer.add_image("Surface", {24}, values), std::logic_error);
  CHECK_THROWS_AS(writer.add_image("other", {23}, values), std::logic_error);
  writer.write(folder / "parts.fits");

  const FitsReader reader(folder / "parts.fits");
  CHECK(reader.names() == std::vector<std::string>{"", "surface", "rough", "rows"});
  CHECK(reader.has("SURFACE"));
  CHECK_FALSE(reader.has("surfaces"));
  const FitsImage surface = reader.image("surface");
  CHECK(surface.shape == std::vector<std::size_t>{2, 3, 4});
  CHECK(surface.unit == "mag");
  CHECK(std::isnan(surface.values[5]));
  CHECK(surface.values[6] == 0.1 * 6);
  CHECK(surface.keywords == std::vector<std::pair<std::string, std::string>>{{"axis_names", "p q"}});
  CHECK(reader.image("rough").values[7] == static_cast<double>(static_cast<float>(values[7])));
  CHECK(reader.table("rows").rows() == 3);
  CHECK(reader.keyword("revision") == "3");
  CHECK(reader.real_keyword("scale") == 0.1);
  CHECK(reader.keyword("exact") == "T");
  CHECK(reader.keyword("late") == "still in the first header");
  CHECK(reader.keyword("axis_names", "surface") == "p q");
  CHECK_FALSE(reader.keyword("absent").has_value());

  const std::string file = (folder / "parts.fits").string();
  CHECK(message_of<InputError>([&] { reader.image("rows"); }) ==
        file + ": its part \"rows\" is not an array; check that this is the right file.");
  CHECK(message_of<InputError>([&] { reader.table("none"); }) ==
        file + ": has no part \"none\" among , surface, rough, rows; check that this is the right file.");
  CHECK(message_of<InputError>([&] { reader.real_keyword("late"); }) ==
        file + ": its keyword late is \"still in the first header\", not a number; check that this is the right file.");
}

TEST_CASE("a FITS file that is cut short or damaged is refused in one sentence") {
  const ScratchFolder folder;
  Table table;
  table.add_reals("x", std::vector<double>(2000, 1.5));
  write_table(table, folder / "good.fits");
  const std::string content = read_file(folder / "good.fits");
  const auto refusal = [&](const std::string& bytes) {
    const auto path = folder.file("bad.fits", bytes);
    return message_of<InputError>([&] { read_table(path); });
  };
  const std::string bad = (folder / "bad.fits").string();
  CHECK(refusal(content.substr(0, content.size() - 2880)).starts_with(bad + ": is cut short: part 2 ends at byte "));
  CHECK(refusal(content.substr(0, 2880)) == bad + ": holds no table; give a FITS file with a binary table.");
  CHECK_FALSE(refusal(content.substr(0, 4000)).empty());
  CHECK(refusal("SIMPLE") == bad + ": is not a FITS file; give a FITS file, or name the table by its own kind.");
  std::string changed = content;
  changed[6000] ^= 1;
  CHECK(refusal(changed) == bad +
                                ": part 2 differs from the checksum written with it; fetch or write it again; it was "
                                "damaged or changed since.");
  write_table(table, folder / "good.fits.gz");
  const std::string packed = read_file(folder / "good.fits.gz");
  const auto short_file = folder.file("bad.fits.gz", packed.substr(0, packed.size() / 2));
  CHECK(message_of<InputError>([&] { read_table(short_file); }) ==
        short_file.string() + ": the compressed file ends too early; fetch or write it again.");
}

TEST_CASE("texts beyond ASCII pass through a FITS header") {
  for (const char* text : {"µ λ 星 🌟", "back\\slash \\u00b5 \\U0001f31f", "line\nbreak\ttab", "plain"}) {
    const std::string escaped = ascii_escaped(text);
    CHECK(std::all_of(escaped.begin(), escaped.end(), [](char c) { return c >= ' ' && c < 0x7F; }));
    CHECK(ascii_unescaped(escaped) == text);
  }
}
