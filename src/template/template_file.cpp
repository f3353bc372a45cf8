#include "template/template_file.h"

#include <fmt/format.h>

#include <stdexcept>

#include "tables/fits_image.h"
#include "template/template_file_parts.h"

namespace thirdrung {

namespace parts = template_parts;

namespace {

using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

std::size_t count(Eigen::Index n) {
  return static_cast<std::size_t>(n);
}

void add_matrix(FitsWriter& writer, const char* part, const RowMajor& matrix, const char* comment, bool as_float,
                const std::string& unit = "") {
  writer.add_image(part, {count(matrix.rows()), count(matrix.cols())}, {matrix.data(), count(matrix.size())}, unit,
                   comment, as_float);
}

void add_nodes(FitsWriter& writer, const char* part, const std::vector<double>& nodes, const char* unit,
               const char* comment) {
  writer.add_image(part, {nodes.size()}, nodes, unit, comment);
}

void add_header(FitsWriter& writer, const TrainedTemplate& trained) {
  const SpectralTemplate& model = trained.model;
  writer.add_keyword({"content", parts::content, "kind of file"});
  writer.add_keyword({"layout", parts::layout, "version of the layout"});
  writer.add_keyword({"name", model.name, "of the template"});
  writer.add_keyword({"phasemin", model.phase_min, "[d] first phase/stretch determined by data"});
  writer.add_keyword({"phasemax", model.phase_max, "[d] last phase/stretch determined by data"});
  writer.add_keyword({"wavemin", model.wavelength_min, "[Angstrom] shortest wavelength, rest frame"});
  writer.add_keyword({"wavemax", model.wavelength_max, "[Angstrom] longest wavelength, rest frame"});
  writer.add_keyword({"scatter", model.log_epoch_scatter.size() > 0, "are there scatter parts?"});
  writer.add_keyword({"modes", std::int64_t{trained.covariance_modes.cols()}, "modes of the covariance"});
  writer.add_keyword({"bands", static_cast<std::int64_t>(trained.responses.size()), "passbands with responses"});
  std::int64_t number = 0;
  writer.add_keyword({"nprov", static_cast<std::int64_t>(model.provenance.size()), "pairs PKEYn, PVALn"});
  for (const auto& [key, value] : model.provenance) {
    ++number;
    writer.add_keyword({fmt::format("pkey{}", number), key, "provenance"});
    writer.add_keyword({fmt::format("pval{}", number), value, ""});
  }
}

void add_coefficients(FitsWriter& writer, const SpectralTemplate& model, bool as_float) {
  add_matrix(writer, parts::phi, model.log_flux, "B-spline coefficients of ln flux, phase by wavelength", as_float);
  add_nodes(writer, parts::phi_phase, model.phase_basis.breakpoints(), "d", "breakpoints of PHI");
  add_nodes(writer, parts::phi_wavelength, model.wavelength_basis.breakpoints(), "Angstrom", "breakpoints of PHI");
  add_matrix(writer, parts::gamma, model.stretch_response, "coefficients of d ln flux / ds at fixed p/s", as_float);
  add_nodes(writer, parts::gamma_phase, model.stretch_phase_basis.breakpoints(), "d", "breakpoints of GAMMA");
  add_nodes(writer, parts::gamma_wavelength, model.stretch_wavelength_basis.breakpoints(), "Angstrom",
            "breakpoints of GAMMA");
  writer.add_image(parts::colour, {count(model.colour_law.size())},
                   {model.colour_law.data(), count(model.colour_law.size())}, "", "coefficients of the colour law K",
                   as_float);
  add_nodes(writer, parts::colour_wavelength, model.colour_basis.breakpoints(), "Angstrom", "breakpoints of COLOUR");
}

void add_gauge(FitsWriter& writer, const SpectralTemplate& model) {
  const std::string unit = "erg-1 s cm2 Angstrom";
  Table table;
  table.add_reals("wavelength", model.gauge_wavelength, "Angstrom", "rest frame");
  table.add_reals("weight_b", model.gauge_weight_b, unit, "sum of weight x flux = 1 at magnitude 0, Bessell B, Vega");
  table.add_reals("weight_v", model.gauge_weight_v, unit, "the same for Bessell V");
  writer.add_table(table, parts::gauge);
}

void add_scatter(FitsWriter& writer, const SpectralTemplate& model, bool as_float) {
  if (model.log_epoch_scatter.size() == 0) return;
  add_matrix(writer, parts::epoch_scatter, model.log_epoch_scatter, "ln of the fractional error of an epoch", as_float);
  add_nodes(writer, parts::epoch_scatter_phase, model.scatter_phase, "d", "rest-frame phase of the nodes");
  add_nodes(writer, parts::epoch_scatter_wavelength, model.scatter_wavelength, "Angstrom", "wavelength of the nodes");
  writer.add_image(parts::colour_scatter, {count(model.log_colour_scatter.size())},
                   {model.log_colour_scatter.data(), count(model.log_colour_scatter.size())}, "",
                   "ln of the colour scatter (fraction of flux)", as_float);
  add_nodes(writer, parts::colour_scatter_wavelength, model.colour_scatter_wavelength, "Angstrom",
            "wavelength of the nodes");
}

void add_uncertainty(FitsWriter& writer, const TrainedTemplate& trained, bool as_float) {
  if (trained.covariance_modes.cols() > 0) {
    add_matrix(writer, parts::modes, trained.covariance_modes.transpose(), "one row a mode: PHI, GAMMA, COLOUR",
               as_float);
  }
  if (trained.responses.empty()) return;
  std::vector<std::string> passbands;
  const auto rows = static_cast<Eigen::Index>(trained.responses.size());
  const Eigen::Index columns = trained.responses.front().zero_point.size();
  RowMajor zero_point(rows, columns);
  RowMajor wavelength(rows, columns);
  for (Eigen::Index i = 0; i < rows; ++i) {
    const CalibrationResponse& response = trained.responses[count(i)];
    passbands.push_back(response.passband);
    zero_point.row(i) = response.zero_point.transpose();
    wavelength.row(i) = response.wavelength.transpose();
  }
  Table table;
  table.add_strings("passband", passbands, "identifier of the training passband");
  writer.add_table(table, parts::response_passbands);
  add_matrix(writer, parts::response_zero_point, zero_point, "d coefficients / d zero point, a row a band", as_float,
             "mag-1");
  add_matrix(writer, parts::response_wavelength, wavelength, "d coefficients / d wavelength, a row a band", as_float,
             "Angstrom-1");
}

void check_sizes(const TrainedTemplate& trained) {
  const SpectralTemplate& model = trained.model;
  const CoefficientLayout layout(model);
  bool fits = model.log_flux.rows() == layout.phi_phases && model.log_flux.cols() == layout.phi_wavelengths &&
              model.stretch_response.rows() == layout.gamma_phases &&
              model.stretch_response.cols() == layout.gamma_wavelengths && model.colour_law.size() == layout.colours;
  fits = fits && (trained.covariance_modes.cols() == 0 || trained.covariance_modes.rows() == layout.size());
  for (const CalibrationResponse& response : trained.responses) {
    fits = fits && response.zero_point.size() == layout.size() && response.wavelength.size() == layout.size();
  }
  if (!fits) throw std::logic_error("the arrays of the template do not fit its grids");
}

}  // namespace

void write_template(const TrainedTemplate& trained, const std::filesystem::path& path,
                    const TemplateFileOptions& options) {
  check_sizes(trained);
  FitsWriter writer;
  add_header(writer, trained);
  add_coefficients(writer, trained.model, options.coefficients_as_float);
  add_gauge(writer, trained.model);
  add_scatter(writer, trained.model, options.coefficients_as_float);
  add_uncertainty(writer, trained, options.uncertainty_as_float);
  writer.write(path);
}

TemplateDescription describe(const TrainedTemplate& trained) {
  const SpectralTemplate& model = trained.model;
  TemplateDescription out;
  out.name = model.name;
  out.phase_min = model.phase_min;
  out.phase_max = model.phase_max;
  out.wavelength_min = model.wavelength_min;
  out.wavelength_max = model.wavelength_max;
  out.coefficients = CoefficientLayout(model).size();
  out.has_scatter = model.log_epoch_scatter.size() > 0;
  out.covariance_modes = static_cast<int>(trained.covariance_modes.cols());
  for (const CalibrationResponse& response : trained.responses) out.calibration_passbands.push_back(response.passband);
  out.gauge_error = gauge_errors(model).largest();
  out.provenance = model.provenance;
  return out;
}

}  // namespace thirdrung
