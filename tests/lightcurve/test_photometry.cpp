#include <catch2/catch.hpp>
#include <cmath>
#include <filesystem>
#include <fstream>

#include "lightcurve/photometry.h"
#include "lightcurve/synthetic_survey.h"

using namespace thirdrung;
using Catch::Contains;

namespace {

const std::string flux_header =
    "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: supernova, datatype: string}\n# - {name: mjd, unit: d, datatype: "
    "float64}\n"
    "# - {name: passband, datatype: string}\n# - {name: flux, unit: uJy, datatype: float64}\n"
    "# - {name: flux_error, unit: uJy, datatype: float64}\n# delimiter: ','\n# schema: astropy-2.0\n"
    "supernova,mjd,passband,flux,flux_error\n";
const std::string mag_header =
    "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: supernova, datatype: string}\n# - {name: mjd, unit: d, datatype: "
    "float64}\n"
    "# - {name: passband, datatype: string}\n# - {name: mag, unit: mag, datatype: float64}\n"
    "# - {name: mag_error, unit: mag, datatype: float64}\n# delimiter: ','\n# schema: astropy-2.0\n"
    "supernova,mjd,passband,mag,mag_error\n";

/// A folder that is gone when the test ends.
struct Folder {
  std::filesystem::path path = std::filesystem::temp_directory_path() / "thirdrung-test-photometry";
  Folder() {
    std::filesystem::remove_all(path);
    std::filesystem::create_directories(path);
  }
  ~Folder() { std::filesystem::remove_all(path); }
  std::filesystem::path write(const std::string& name, const std::string& content) const {
    std::ofstream(path / name) << content;
    return path / name;
  }
};

Photometry read(const std::string& content) {
  const Folder folder;
  return read_photometry(folder.write("photometry.ecsv", content), testing::invented_catalogue(), "invented");
}

/// The one reason for which a table's second supernova is set aside.
std::string reason(const std::string& bad_row) {
  const Photometry out = read(flux_header + "good,58000,blue,1,0.1\n" + bad_row + "\n");
  CHECK(out.light_curves.size() == 1);
  return out.set_aside.size() == 1 ? out.set_aside[0].reason : "";
}

}  // namespace

TEST_CASE("fluxes are read in order of appearance, negative ones too") {
  const Photometry out = read(flux_header + "b,58000,blue,-1.5,0.1\na,58001,red,2,0.2\nb,58002,red,3,0.3\n");
  REQUIRE(out.light_curves.size() == 2);
  CHECK(out.set_aside.empty());
  const LightCurve& b = out.light_curves[0];
  CHECK(b.supernova == "b");
  CHECK(b.survey == "invented");
  CHECK(b.passbands == std::vector<std::string>{"blue", "red"});
  REQUIRE(b.epochs.size() == 2);
  CHECK(b.epochs[0].flux == -1.5);
  CHECK(b.epochs[0].flux_error == 0.1);
  CHECK(b.epochs[1].row == 3);
}

// Source: Oke & Gunn 1983: AB magnitude 0 is 3631 Jy, so 20.0 mag is 36.31 uJy, and 0.01 mag of it 0.3344 uJy.
TEST_CASE("magnitudes become fluxes on the AB scale", "[published]") {
  const Photometry out = read(mag_header + "a,58000,blue,20.0,0.01\n");
  REQUIRE(out.light_curves.size() == 1);
  CHECK(out.light_curves[0].epochs[0].flux == Approx(36.31).epsilon(1e-12));
  CHECK(out.light_curves[0].epochs[0].flux_error == Approx(36.31 * 0.01 * std::log(10) / 2.5).epsilon(1e-12));
}

TEST_CASE("a row that repeats an earlier one is counted once") {
  const Photometry out = read(flux_header + "a,58000,blue,1,0.1\na,58000,blue,1,0.1\na,58000,blue,1.1,0.1\n");
  CHECK(out.light_curves[0].epochs.size() == 2);
  CHECK(out.light_curves[0].repeated_rows == 1);
}

TEST_CASE("a bad row sets its supernova aside and names file, row and column") {
  CHECK_THAT(reason("bad,58000,bleu,1,0.1"),
             Contains("photometry.ecsv, row 2, column passband") && Contains("bleu") && Contains("blue"));
  CHECK_THAT(reason("bad,58000,blue,1,-0.1"), Contains("row 2, column flux_error") && Contains("-0.1"));
  CHECK_THAT(reason("bad,58000,blue,1,0"), Contains("row 2, column flux_error"));
  CHECK_THAT(reason("bad,58000,blue,1,nan"), Contains("row 2, column flux_error"));
  CHECK_THAT(reason("bad,58000,blue,1,"), Contains("row 2, column flux_error") && Contains("missing"));
  CHECK_THAT(reason("bad,58000,blue,inf,0.1"), Contains("row 2, column flux") && Contains("inf"));
  CHECK_THAT(reason("bad,,blue,1,0.1"), Contains("row 2, column mjd"));
  CHECK_THAT(reason(",58000,blue,1,0.1"), Contains("row 2, column supernova"));
}

TEST_CASE("what is wrong with a whole table is thrown") {
  CHECK_THROWS_WITH(read(flux_header + "bad,58000,blue,1,-0.1\n"), Contains("row 1, column flux_error"));
  CHECK_THROWS_WITH(read(flux_header), Contains("no rows"));
  std::string text = flux_header + "a,58000,blue,1,0.1\n";
  const auto replaced = [&](const std::string& from, const std::string& to) {
    std::string out = text;
    out.replace(out.find(from), from.size(), to);
    return out;
  };
  CHECK_THROWS_WITH(read(replaced("name: flux, unit: uJy", "name: flux, unit: mag")), Contains("column flux"));
  CHECK_THROWS_WITH(read(replaced("name: flux, unit: uJy", "name: flux")), Contains("column flux"));
  const Folder folder;
  CHECK_THROWS_AS(read_photometry(folder.path / "none.ecsv", testing::invented_catalogue(), "invented"), InputError);
  CHECK_THROWS_WITH(read_photometry(folder.path, testing::invented_catalogue(), "invented"), Contains("no table"));
}

TEST_CASE("a folder of tables is read in order of name, one supernova a file") {
  const Folder folder;
  folder.write("second.csv", "mjd,passband,flux,flux_error\n58000,red,1,0.1\n");
  folder.write("first.csv", "mjd,passband,mag,mag_error\n58000,blue,20,0.1\n");
  folder.write("third.ecsv", flux_header + "second,58001,blue,2,0.1\n");
  folder.write("notes.txt", "not a table");
  const Photometry out = read_photometry(folder.path, testing::invented_catalogue(), "invented");
  REQUIRE(out.light_curves.size() == 2);
  CHECK(out.light_curves[0].supernova == "first");
  CHECK(out.light_curves[1].supernova == "second");
  CHECK(out.light_curves[1].epochs.size() == 2);
}
