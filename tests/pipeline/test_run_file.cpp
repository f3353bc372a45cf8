#include <catch2/catch.hpp>
#include <cstdlib>
#include <fstream>
#include <string>

#include "base/error.h"
#include "pipeline/run_file.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

const std::string smallest = R"([template]
file = "t.fits"
[passbands]
catalogue = "p/catalogue.toml"
[[survey]]
name = "north"
photometry = "n.ecsv"
supernovae = "s.ecsv"
)";

RunFile read(const std::string& text) {
  const ScratchFolder folder;
  const auto file = folder.path() / "run.toml";
  std::ofstream(file) << text;
  return read_run_file(file);
}

std::string fault(const std::string& text) {
  try {
    read(text);
  } catch (const InputError& error) {
    return error.what();
  }
  return "";
}

}  // namespace

TEST_CASE("a run file of inputs alone gets the defaults") {
  const RunFile run = read(smallest);
  CHECK(run.name == "run");
  CHECK(run.output.filename() == "run-results");
  CHECK(run.surveys.size() == 1);
  CHECK(run.surveys[0].photometry.path.filename() == "n.ecsv");
  CHECK(run.surveys[0].photometry.written == "n.ecsv");
  CHECK_FALSE(run.blind);
  CHECK_FALSE(run.scans.wanted);
  CHECK_FALSE(run.join.wanted);
  CHECK(run.intercept.options.z_min == 0.0233);
  CHECK(run.cuts.z_max == 0.15);
  CHECK(run.redshift.options.velocity == VelocitySource::infall);
}

TEST_CASE("every section is read") {
  const RunFile run = read(smallest + R"(
[run]
name = "season two"
threads = 3
seed = 9
[milky_way]
law = "odonnell94"
r_v = 2.9
scale = 0.86
[lightcurve]
phase_max = 30
robust = true
s_prior = { mean = 1.0, width = 0.1 }
[redshift]
velocity = "none"
sigma_v = 300
[redshift.sun]
speed = 371
[cuts]
c_max = 0.2
s_error_max = "off"
host_mass = true
[standardisation]
gamma = 0.0
population_per_survey = true
[intercept]
z_min = 0.02
expansion = "flat_lcdm"
omega_m = 0.32
[[systematic]]
kind = "zero_point"
surveys = ["north"]
together = true
size = 0.01
[scans]
z_min = [0.02, 0.03]
surveys = true
bootstrap = { count = 100, seed = 4 }
[join]
m_b = -19.25
m_b_error = 0.03
)");
  CHECK(run.threads == 3);
  CHECK(run.milky_way.law == DustLaw::odonnell94);
  CHECK(run.milky_way.scale == 0.86);
  CHECK(run.lightcurve.robust);
  REQUIRE(run.lightcurve.s_prior);
  CHECK(run.lightcurve.s_prior->width == 0.1);
  CHECK(run.redshift.options.sun.speed == 371);
  CHECK(run.cuts.c_max == 0.2);
  CHECK_FALSE(run.cuts.s_error_max);
  CHECK(run.cuts.host_mass);
  CHECK(run.cuts.z_min == 0.02);
  CHECK(run.standardisation.options.gamma == 0.0);
  CHECK(run.intercept.options.flow.expansion.form == Expansion::Form::flat_lcdm);
  CHECK(run.intercept.options.flow.expansion.omega_m == 0.32);
  REQUIRE(run.systematics.size() == 1);
  CHECK(run.systematics[0].together);
  CHECK(run.scans.axes.size() == 3);
  CHECK(run.join.wanted);
  CHECK(run.blind);  // A run that joins is blind unless told otherwise.
}

TEST_CASE("what a run file does not know is refused with the nearest that it does") {
  using Catch::Matchers::Contains;
  CHECK_THAT(fault(smallest + "[cuts]\nc_mx = 1\n"), Contains("row 10") && Contains("c_mx") && Contains("\"c_max\""));
  CHECK_THAT(fault(smallest + "[interceptt]\n"), Contains("row 9") && Contains("[intercept]?") && !Contains("?."));
  CHECK_THAT(fault(smallest + "[scans]\nz_mn = true\n"), Contains("\"z_min\""));
  CHECK_THAT(fault(smallest + "[[systematic]]\nkind = \"wavelenth\"\n"), Contains("\"wavelength\""));
  CHECK_THAT(fault("[template]\nfil = \"t\"\n"), Contains("\"file\""));
  CHECK_THAT(fault(smallest + "[lightcurve.s_prior]\nmen = 1\n"), Contains("\"mean\""));
}

TEST_CASE("values that make no sense are refused") {
  using Catch::Matchers::Contains;
  CHECK_THAT(fault(smallest + "[intercept]\nz_min = 0.3\n"), Contains("not below z_max"));
  CHECK_THAT(fault(smallest + "[intercept]\nomega_m = 0.3\n"), Contains("no meaning"));
  CHECK_THAT(fault(smallest + "[join]\nm_b = -19\n"), Contains("m_b_error"));
  CHECK_THAT(fault(smallest + "[join]\nm_b = -19\ncalibrators = \"c.ecsv\"\n"), Contains("keep one of the two"));
  CHECK_THAT(fault(smallest + "[join]\ncovariance = \"c.fits\"\n"), Contains("no calibrators"));
  CHECK_THAT(fault(smallest + "[milky_way]\nsource = \"map\"\n"), Contains("needs a map"));
  CHECK_THAT(fault(smallest + "[redshift]\nvelocity = \"grid\"\n"), Contains("velocity_field"));
  CHECK_THAT(fault(smallest + "[[survey]]\nname = \"north\"\nphotometry = \"a\"\nsupernovae = \"b\"\n"),
             Contains("two surveys are called north"));
  CHECK_THAT(fault(smallest + "[[systematic]]\nkind = \"redshift\"\npassbands = [\"x\"]\n"),
             Contains("has no passbands"));
  CHECK_THAT(fault("[template]\nfile = \"t\"\n[passbands]\ncatalogue = \"c\"\n"), Contains("[[survey]]"));
}

TEST_CASE("a path takes environment variables") {
  setenv("THIRDRUNG_TEST_PLACE", "/some/where", 1);
  std::string text = smallest;
  text.replace(text.find("n.ecsv"), 6, "${THIRDRUNG_TEST_PLACE}/n.ecsv");
  const RunFile run = read(text);
  CHECK(run.surveys[0].photometry.path == "/some/where/n.ecsv");
  CHECK(run.surveys[0].photometry.written == "${THIRDRUNG_TEST_PLACE}/n.ecsv");
}

TEST_CASE("the normal form of a section does not depend on comments, blanks and order") {
  const RunFile one = read(smallest + "[cuts]\nc_max = 0.2 # small\ns_min = 0.8\n");
  const RunFile two = read(smallest + "[cuts]\n\ns_min = 0.8\nc_max   = 0.2\n");
  CHECK(one.sections.at("cuts") == two.sections.at("cuts"));
  CHECK(one.sections.at("cuts") != read(smallest).sections.at("cuts"));
}

TEST_CASE("a run that joins by calibrators is blind, and names their files") {
  const RunFile run = read(smallest + "[join]\ncalibrators = \"c.ecsv\"\ncovariance = \"c.fits\"\n");
  CHECK(run.join.wanted);
  CHECK(run.blind);
  CHECK(run.join.calibrators.written == "c.ecsv");
  CHECK(run.join.covariance.written == "c.fits");
}

TEST_CASE("errors of a survey are multiplied for all passbands, or for those named") {
  using Catch::Matchers::Contains;
  const auto light_curves = [] {
    Photometry out{std::vector<LightCurve>(1), {}};
    out.light_curves[0].passbands = {"north-b", "north-r"};
    out.light_curves[0].epochs = {{57000, 0, 10, 1, 1}, {57001, 1, 20, 2, 2}};
    return out;
  };
  PassbandCatalogue catalogue;
  for (const std::string id : {"north-b", "north-g", "north-r"})
    catalogue.add({Passband(id, {4000, 5000, 6000}, {0, 1, 0}, Response::photon, "invented")});
  auto all = light_curves();
  read(smallest + "error_scale = 1.5\n").surveys[0].error_scale.apply(all, catalogue);
  CHECK(all.light_curves[0].epochs[0].flux_error == 1.5);
  CHECK(all.light_curves[0].epochs[1].flux_error == 3.0);
  CHECK(all.light_curves[0].epochs[1].flux == 20);
  auto one = light_curves();
  read(smallest + "error_scale = {north-r = 1.25}\n").surveys[0].error_scale.apply(one, catalogue);
  CHECK(one.light_curves[0].epochs[0].flux_error == 1.0);
  CHECK(one.light_curves[0].epochs[1].flux_error == 2.5);
  auto none = light_curves();
  read(smallest).surveys[0].error_scale.apply(none, catalogue);
  CHECK(none.light_curves[0].epochs[1].flux_error == 2.0);

  auto wrong = light_curves();
  const ErrorScale scale = read(smallest + "error_scale = {north-g = 1.25}\n").surveys[0].error_scale;
  CHECK_THROWS_WITH(scale.apply(wrong, catalogue), Contains("row 9") && Contains("north-g"));
  CHECK(wrong.light_curves[0].epochs[1].flux_error == 2.0);
  // A supernova that was set aside may have been the one with that passband; no supernova has one without a curve.
  wrong.set_aside.push_back({"n-1", "north", "a value that is not a number"});
  CHECK_NOTHROW(scale.apply(wrong, catalogue));
  const ErrorScale unknown = read(smallest + "error_scale = {north-y = 1.25}\n").surveys[0].error_scale;
  CHECK_THROWS_WITH(unknown.apply(wrong, catalogue), Contains("north-y"));
  CHECK_THAT(fault(smallest + "error_scale = 0\n"), Contains("row 9") && Contains("from 0.1 to 10"));
  CHECK_THAT(fault(smallest + "error_scale = \"big\"\n"), Contains("error_scale"));
  CHECK_THAT(fault(smallest + "error_scale = [1.1, 1.2]\n"), Contains("row 9") && Contains("passband = number"));
  CHECK_THAT(fault(smallest + "error_scale = {north-r = -1}\n"), Contains("north-r") && Contains("from 0.1 to 10"));
}
