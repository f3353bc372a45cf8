#include "report/page.h"

#include <fmt/format.h>

#include <algorithm>

#include "base/atomic_file.h"
#include "base/error.h"
#include "base/text.h"
#include "report/lightcurve_panels.h"
#include "report/page_data.h"
#include "report/page_sources.h"

namespace thirdrung {
namespace {

/// Replaces each {{mark}} of the skeleton; marks inside what is put in stay as they are.
std::string fill(std::string_view skeleton, const std::vector<std::pair<std::string, const std::string*>>& values) {
  std::string page;
  std::size_t size = skeleton.size();
  for (const auto& [mark, value] : values) size += value->size();
  page.reserve(size);
  std::size_t from = 0;
  while (true) {
    const std::size_t open = skeleton.find("{{", from);
    page.append(skeleton.substr(from, open == std::string_view::npos ? open : open - from));
    if (open == std::string_view::npos) return page;
    const std::size_t close = skeleton.find("}}", open);
    const std::string mark(skeleton.substr(open + 2, close - open - 2));
    const auto found =
        std::find_if(values.begin(), values.end(), [&](const auto& entry) { return entry.first == mark; });
    if (found == values.end()) throw std::logic_error("the page's skeleton has the unknown mark " + mark);
    page += *found->second;
    from = close + 2;
  }
}

std::string escaped_for_html(const std::string& text) {
  std::string result;
  for (const char c : text) {
    if (c == '<')
      result += "&lt;";
    else if (c == '>')
      result += "&gt;";
    else if (c == '&')
      result += "&amp;";
    else if (c == '"')
      result += "&quot;";
    else
      result += c;
  }
  return result;
}

/// Percent-encoded for use as a relative URL.
std::string url_of(const std::string& name) {
  std::string result;
  for (const char c : name) {
    const auto byte = static_cast<unsigned char>(c);
    const bool plain = (byte >= 'a' && byte <= 'z') || (byte >= 'A' && byte <= 'Z') || (byte >= '0' && byte <= '9') ||
                       c == '-' || c == '_' || c == '.';
    if (plain)
      result += c;
    else
      fmt::format_to(std::back_inserter(result), "%{:02X}", byte);
  }
  return result;
}

std::string joined(const std::vector<std::string>& panels, std::size_t from, std::size_t to) {
  std::string text;
  for (std::size_t i = from; i < to; ++i) {
    if (i > from) text += ',';
    text += panels[i].empty() ? "null" : panels[i];
  }
  return text;
}

/// Writes the panels into numbered files, each a call that hands them to the page.
void write_panel_files(const std::vector<std::string>& panels, const std::filesystem::path& folder,
                       std::size_t a_file) {
  std::error_code fault;
  std::filesystem::create_directories(folder, fault);
  if (fault)
    throw OutputError(
        fmt::format("{}: the folder of the light curves cannot be made ({})", folder.string(), fault.message()));
  std::size_t number = 0;
  for (std::size_t from = 0; from < panels.size(); from += a_file, ++number) {
    const std::size_t to = std::min(from + a_file, panels.size());
    write_file_atomically(
        folder / fmt::format("part-{}.js", number),
        fmt::format("thirdrungLightCurves({},[{}]);\n", number, escaped_for_script(joined(panels, from, to))));
  }
  // An earlier, larger page may have left more of them.
  while (std::filesystem::remove(folder / fmt::format("part-{}.js", number), fault)) ++number;
}

std::vector<ChartSection> all_sections(const ChartInput& input) {
  return {hubble_section(input),     residual_section(input),  standardisation_section(input),
          population_section(input), ladder_section(input),    choices_section(input),
          budget_section(input),     influence_section(input), velocity_section(input)};
}

}  // namespace

PageResult write_page(const PageOptions& options) {
  const RunTables run = read_run_tables(options.folder);
  const SupernovaRows all = join_supernova_rows(run);
  PageResult result;
  result.page = options.output.empty() ? options.folder / "report.html" : options.output;

  nlohmann::json data = page_data(run, all, make_answer(run), all_sections({run, all}));
  data["title"] = options.title;
  data["lightcurves"] = nullptr;
  const auto panels = lightcurve_panels(options.folder, all);
  std::string inside;
  const bool any = std::any_of(panels.begin(), panels.end(), [](const std::string& panel) { return !panel.empty(); });
  if (any && all.rows.size() <= options.lightcurves_inside) {
    data["lightcurves"] = {{"inside", true}};
    inside = escaped_for_script(joined(panels, 0, panels.size()));
  } else if (any) {
    const std::string name = result.page.stem().string() + "-lightcurves";
    result.lightcurve_folder = result.page.parent_path() / name;
    const std::size_t a_file = std::max<std::size_t>(1, options.lightcurves_a_file);
    write_panel_files(panels, result.lightcurve_folder, a_file);
    nlohmann::json known = nlohmann::json::array();
    for (const std::string& panel : panels) known.push_back(panel.empty() ? 0 : 1);
    data["lightcurves"] = {{"inside", false}, {"folder", url_of(name)}, {"a_file", a_file}, {"known", known}};
  }

  const PageSources sources = page_sources();
  const std::string title = escaped_for_html(options.title), css(sources.css), script(sources.js),
                    vega = vega_bundle(options.vega_folder), json = json_for_script(data), curves = "[" + inside + "]";
  // Only scripts that carry this word run. It hangs on the whole content, so nothing inside the content can carry it.
  const std::string nonce = sha256_of_text(json + curves).substr(0, 32);
  const std::string page = fill(sources.html, {{"title", &title},
                                               {"nonce", &nonce},
                                               {"css", &css},
                                               {"vega", &vega},
                                               {"data", &json},
                                               {"curves", &curves},
                                               {"script", &script}});
  write_file_atomically(result.page, page);
  result.bytes = page.size();
  return result;
}

}  // namespace thirdrung
