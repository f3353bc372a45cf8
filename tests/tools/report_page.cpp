// Writes page, figures or terminal summary of a folder of result tables, for tests that look at them from outside.
// usage: report_page page FOLDER OUTPUT [TITLE] [VEGA-FOLDER] | figures FOLDER OUTPUT [one|two] | text FOLDER
#include <cstdio>
#include <exception>
#include <string>

#include "report/figures.h"
#include "report/page.h"
#include "report/summary_text.h"

int main(int count, char** words) {
  using namespace thirdrung;
  try {
    const std::string what = count > 1 ? words[1] : "", folder = count > 2 ? words[2] : "";
    if (what == "page" && count >= 4) {
      PageOptions options;
      options.folder = folder;
      options.output = words[3];
      if (count >= 5) options.title = words[4];
      if (count >= 6) options.vega_folder = words[5];
      const PageResult result = write_page(options);
      std::printf("%zu bytes\n", result.bytes);
      return 0;
    }
    if (what == "figures" && count >= 4) {
      const bool one = count >= 5 && std::string(words[4]) == "one";
      for (const auto& file :
           write_figures({folder, words[3], one ? FigureWidth::one_column : FigureWidth::two_columns}).files)
        std::printf("%s\n", file.c_str());
      return 0;
    }
    if (what == "text" && count >= 3) {
      std::fputs(summary_text({folder}).c_str(), stdout);
      return 0;
    }
    std::fputs(
        "usage: report_page page FOLDER OUTPUT [TITLE] [VEGA-FOLDER] | figures FOLDER OUTPUT [one|two] | text FOLDER\n",
        stderr);
    return 2;
  } catch (const std::exception& fault) {
    std::fprintf(stderr, "%s\n", fault.what());
    return 3;
  }
}
