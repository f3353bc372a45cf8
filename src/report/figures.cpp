#include "report/figures.h"

#include <fmt/format.h>

#include "base/atomic_file.h"
#include "base/error.h"
#include "report/figure_parts.h"

namespace thirdrung {

FigureResult write_figures(const FigureOptions& options) {
  const RunTables run = read_run_tables(options.folder);
  const SupernovaRows all = join_supernova_rows(run);
  const ChartInput input{run, all};
  std::error_code fault;
  std::filesystem::create_directories(options.output_folder, fault);
  if (fault)
    throw OutputError(fmt::format("{}: the folder of the figures cannot be made ({})", options.output_folder.string(),
                                  fault.message()));
  const double millimetre = 72 / 25.4;
  const double width = (options.width == FigureWidth::one_column ? 88 : 180) * millimetre;
  FigureResult result;
  for (const Figure& figure :
       {hubble_figure(input, width), residual_figure(input, width), standardisation_figure(input, width),
        population_figure(input, width), calibrator_figure(input, width), scan_figure(input, width),
        budget_figure(input, width)}) {
    if (!figure.possible) continue;
    for (const bool pdf : {false, true}) {
      const std::filesystem::path path = options.output_folder / (figure.name + (pdf ? ".pdf" : ".svg"));
      write_atomically(path, [&](const std::filesystem::path& unfinished) {
        Drawing drawing(unfinished, pdf ? Drawing::Format::pdf : Drawing::Format::svg, width, figure.height);
        figure.draw(drawing, input);
        drawing.finish();
      });
      result.files.push_back(path);
    }
  }
  return result;
}

}  // namespace thirdrung
