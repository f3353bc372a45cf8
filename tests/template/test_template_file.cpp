#include <catch2/catch.hpp>
#include <fstream>

#include "base/text.h"
#include "tables/fits_image.h"
#include "tables/scratch_folder.h"
#include "template/gauged_template.h"
#include "template/template_file.h"
#include "template/template_file_parts.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

/// The gauged template with modes and responses of no meaning.
TrainedTemplate trained() {
  TrainedTemplate out;
  out.model = gauged_template();
  out.model.provenance = {{"training samples", "dawn, dusk"}, {"remark", std::string(150, 'x') + " λ"}};
  const Eigen::Index size = CoefficientLayout(out.model).size();
  out.covariance_modes.resize(size, 3);
  for (Eigen::Index i = 0; i < size; ++i) {
    for (Eigen::Index k = 0; k < 3; ++k) out.covariance_modes(i, k) = 1e-3 * std::sin(static_cast<double>(i + 7 * k));
  }
  for (const char* band : {"dawn_g", "dusk_r"}) {
    CalibrationResponse response;
    response.passband = band;
    response.zero_point = out.covariance_modes.col(0) * 20;
    response.wavelength = out.covariance_modes.col(1) * (band[1] == 'a' ? 0.1 : 0.2);
    out.responses.push_back(std::move(response));
  }
  return out;
}

std::string complaint(const TrainedTemplate& damaged, const ScratchFolder& folder) {
  write_template(damaged, folder / "bad.fits");
  return message_of<InputError>([&] { read_template(folder / "bad.fits"); });
}

/// Copies a template file without one of its parts.
void copy_without(const TrainedTemplate& from, const std::string& left_out, const ScratchFolder& folder) {
  write_template(from, folder / "whole.fits");
  const FitsReader reader(folder / "whole.fits");
  FitsWriter writer;
  for (const char* key : {"content", "layout", "name", "phasemin", "phasemax", "wavemin", "wavemax"}) {
    writer.add_keyword({key, reader.required_keyword(key), ""});
  }
  writer.add_keyword({"scatter", true, ""});
  writer.add_keyword({"modes", std::int64_t{3}, ""});
  writer.add_keyword({"bands", std::int64_t{2}, ""});
  writer.add_keyword({"nprov", std::int64_t{0}, ""});
  for (const std::string& name : reader.names()) {
    if (name.empty() || name == left_out) continue;
    if (name == template_parts::gauge || name == template_parts::response_passbands) {
      writer.add_table(reader.table(name), name);
    } else {
      const FitsImage image = reader.image(name);
      writer.add_image(name, image.shape, image.values);
    }
  }
  writer.write(folder / "part.fits");
}

}  // namespace

TEST_CASE("the test template is in its gauge") {
  // The phase of maximum is sought with differences over 0.02 d, which the skewness of the curve moves by 1e-6 d.
  CHECK(gauge_errors(gauged_template()).largest() < 1e-5);
}

TEST_CASE("a template survives its file") {
  const ScratchFolder folder;
  const TrainedTemplate before = trained();
  for (const char* name : {"t.fits", "t.fits.gz"}) {
    write_template(before, folder / name);
    const TrainedTemplate after = read_template(folder / name);
    CHECK(after.model.name == before.model.name);
    CHECK(after.model.provenance == before.model.provenance);
    CHECK(after.model.log_flux == before.model.log_flux);
    CHECK(after.model.stretch_response == before.model.stretch_response);
    CHECK(after.model.colour_law == before.model.colour_law);
    CHECK(after.model.log_epoch_scatter == before.model.log_epoch_scatter);
    CHECK(after.model.log_colour_scatter == before.model.log_colour_scatter);
    CHECK(after.model.gauge_weight_v == before.model.gauge_weight_v);
    CHECK(after.model.phase_min == before.model.phase_min);
    CHECK(after.model.wavelength_max == before.model.wavelength_max);
    CHECK(after.model.flux(3.3, 4567, 0.9, 0.1) == before.model.flux(3.3, 4567, 0.9, 0.1));
    CHECK(after.model.epoch_scatter(3.3, 4567) == before.model.epoch_scatter(3.3, 4567));
    // Single precision: 24 bits.
    CHECK((after.covariance_modes - before.covariance_modes).norm() < 1e-7 * before.covariance_modes.norm());
    REQUIRE(after.responses.size() == 2);
    CHECK(after.responses[1].passband == "dusk_r");
    CHECK((after.responses[1].wavelength - before.responses[1].wavelength).norm() <
          1e-7 * before.responses[1].wavelength.norm());
  }
}

TEST_CASE("a template in single precision stays in its gauge; one without uncertainty is read") {
  const ScratchFolder folder;
  TrainedTemplate bare;
  bare.model = gauged_template();
  bare.model.log_epoch_scatter.resize(0, 0);
  TemplateFileOptions options;
  options.coefficients_as_float = true;
  write_template(bare, folder / "t.fits", options);
  const TemplateDescription about = describe(read_template(folder / "t.fits"));
  CHECK(about.gauge_error < 1e-5);
  CHECK_FALSE(about.has_scatter);
  CHECK(about.covariance_modes == 0);
  CHECK(about.calibration_passbands.empty());
  CHECK(about.coefficients == CoefficientLayout(bare.model).size());
}

TEST_CASE("equal templates give equal files") {
  const ScratchFolder folder;
  write_template(trained(), folder / "a.fits");
  write_template(trained(), folder / "b.fits");
  CHECK(read_file(folder / "a.fits") == read_file(folder / "b.fits"));
}

TEST_CASE("a violated gauge is refused by name") {
  const ScratchFolder folder;
  TrainedTemplate bad = trained();
  bad.model.colour_law.array() += 0.01;
  std::string said = complaint(bad, folder);
  CHECK(said.find("colour law over B") != std::string::npos);
  CHECK(said.find("maximum") == std::string::npos);
  bad = trained();
  bad.model.log_flux.array() += 2e-4;
  said = complaint(bad, folder);
  CHECK(said.find("B magnitude 0 at maximum (off by -0.00022)") != std::string::npos);
  CHECK(said.find("bad.fits") != std::string::npos);
}

TEST_CASE("an absent part, a wrong shape and values that are not finite are named") {
  const ScratchFolder folder;
  for (const char* part : {"PHI", "GAMMA_PHASE", "COLOUR_SCATTER", "COVARIANCE_MODES", "RESPONSE_ZERO_POINT"}) {
    copy_without(trained(), part, folder);
    const std::string said = message_of<InputError>([&] { read_template(folder / "part.fits"); });
    CAPTURE(said);
    CHECK(said.find(std::string("no part \"") + part + "\"") != std::string::npos);
  }
  TrainedTemplate bad = trained();
  bad.model.log_flux(2, 3) = std::nan("");
  CHECK(complaint(bad, folder).find("part PHI is not finite") != std::string::npos);
  bad = trained();
  bad.model.colour_scatter_wavelength.pop_back();
  CHECK(complaint(bad, folder).find("part COLOUR_SCATTER has the shape 5, its grids ask for 4") != std::string::npos);
  bad = trained();
  bad.model.colour_law.conservativeResize(3);
  CHECK_THROWS_AS(write_template(bad, folder / "bad.fits"), std::logic_error);
}

TEST_CASE("damaged and foreign files are refused") {
  const ScratchFolder folder;
  write_template(trained(), folder / "t.fits");
  const std::string content = read_file(folder / "t.fits");
  CHECK_THROWS_AS(read_template(folder.file("cut.fits", content.substr(0, content.size() / 2))), InputError);
  std::string flipped = content;
  flipped[flipped.size() / 2] = static_cast<char>(flipped[flipped.size() / 2] ^ 0x40);
  CHECK_THROWS_AS(read_template(folder.file("flipped.fits", flipped)), InputError);
  FitsWriter other;
  other.add_image("PHI", {1}, std::vector<double>{1.0});
  other.write(folder / "other.fits");
  const std::string said = message_of<InputError>([&] { read_template(folder / "other.fits"); });
  CHECK(said.find("is not a template file") != std::string::npos);
}
