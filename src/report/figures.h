#pragma once

#include <filesystem>
#include <vector>

namespace thirdrung {

enum class FigureWidth {
  one_column,  ///< 88 mm.
  two_columns  ///< 180 mm.
};

struct FigureOptions {
  std::filesystem::path folder;         ///< Output folder of a run; its result tables are read.
  std::filesystem::path output_folder;  ///< Made if absent.
  FigureWidth width = FigureWidth::two_columns;
};

struct FigureResult {
  std::vector<std::filesystem::path> files;
};

/// Writes the six main figures for a paper, each as SVG and PDF: hubble, residuals, standardisation, populations,
/// scans, budget.
///
/// A figure whose tables the run lacks is left out. Drawn with cairo: vector output in both formats from one drawing,
/// fonts embedded as subsets (PDF) or as outlines (SVG), text in any script by fontconfig, and nothing to install at
/// run time beyond the library. Surveys differ in shape and in lightness, so that the figures read in grey. Text is 7
/// pt (ticks) and 8 pt (titles) in either width. The same tables give the same bytes.
///
/// Throws InputError if the folder holds no result of a run, OutputError if a figure cannot be written.
FigureResult write_figures(const FigureOptions& options);

}  // namespace thirdrung
