#include "pipeline/run_file.h"

#include <fmt/format.h>
#include <fmt/ranges.h>

#include <array>
#include <sstream>

#include "base/text.h"
#include "pipeline/run_file_sections.h"

namespace thirdrung {

namespace {

using Reader = void (*)(RunSection, RunFile&);

struct KnownSection {
  const char* name;
  Reader read;
  bool list;  ///< Written [[name]], any number of them.
};

constexpr std::array<KnownSection, 15> known_sections = {{{"run", read_run_section, false},
                                                          {"template", read_template_section, false},
                                                          {"passbands", read_passbands_section, false},
                                                          {"survey", read_survey_section, true},
                                                          {"milky_way", read_milky_way_section, false},
                                                          {"lightcurve", read_lightcurve_section, false},
                                                          {"redshift", read_redshift_section, false},
                                                          {"intercept", read_intercept_section, false},
                                                          {"cuts", read_cuts_section, false},
                                                          {"standardisation", read_standardisation_section, false},
                                                          {"selection", read_selection_section, true},
                                                          {"systematic", read_systematic_section, true},
                                                          {"scans", read_scans_section, false},
                                                          {"join", read_join_section, false},
                                                          {"report", read_report_section, false}}};

void refuse_unknown_sections(const toml::table& root, const std::string& file) {
  std::vector<std::string> names;
  names.reserve(known_sections.size());
  for (const KnownSection& known : known_sections) names.emplace_back(known.name);
  for (const auto& [key, node] : root) {
    const std::string word(key.str());
    if (std::find(names.begin(), names.end(), word) != names.end()) continue;
    const std::string near = nearest_word(word, names);
    throw InputError(
        {file, std::size_t{node.source().begin.line}, word}, fmt::format("a run file has no section [{}]", word),
        near.empty() ? fmt::format("known: {}", fmt::join(names, ", ")) : fmt::format("did you mean [{}]?", near));
  }
}

void read_list(const KnownSection& known, const toml::node* node, const std::string& file, RunFile& run) {
  if (node == nullptr) return;
  const toml::array* list = node->as_array();
  const Place place{file, std::size_t{node->source().begin.line}, known.name};
  if (list == nullptr || list->empty() || !list->is_homogeneous(toml::node_type::table)) {
    throw InputError(place, fmt::format("{} is not a list of sections", known.name),
                     fmt::format("write [[{}]]", known.name));
  }
  for (const toml::node& item : *list)
    known.read(RunSection(*item.as_table(), file, fmt::format("[[{}]]", known.name)), run);
}

void read_one(const KnownSection& known, const toml::node* node, const std::string& file, RunFile& run) {
  const std::string name = fmt::format("[{}]", known.name);
  if (node == nullptr) return known.read(RunSection(file, name), run);
  if (node->as_table() == nullptr) {
    throw InputError({file, std::size_t{node->source().begin.line}, known.name},
                     fmt::format("{} is not a section", known.name), fmt::format("write [{}]", known.name));
  }
  known.read(RunSection(*node->as_table(), file, name), run);
}

/// The section without comments, blanks and order of keys.
std::string normal_form(const toml::node* node) {
  if (node == nullptr) return "";
  std::ostringstream out;
  if (const auto* table = node->as_table())
    out << toml::json_formatter(*table);
  else if (const auto* list = node->as_array())
    out << toml::json_formatter(*list);
  return out.str();
}

}  // namespace

RunFile read_run_file(const std::filesystem::path& path) {
  const std::string file = path.string();
  RunFile run;
  run.path = path;
  run.text = read_text_file(path);
  const toml::table root = parse_toml(run.text, file);
  refuse_unknown_sections(root, file);
  for (const KnownSection& known : known_sections) {
    const toml::node* node = root.get(known.name);
    run.sections[known.name] = normal_form(node);
    if (known.list)
      read_list(known, node, file, run);
    else
      read_one(known, node, file, run);
  }
  if (run.surveys.empty()) {
    throw InputError({file, std::nullopt, "survey"}, "no [[survey]] is named", "give at least one");
  }
  return run;
}

void read_run_section(RunSection section, RunFile& run) {
  run.name = section.text("name", run.path.stem().string());
  const InputFile output = section.optional_path("output");
  run.output = output.given() ? output.path : run.path.parent_path() / (run.path.stem().string() + "-results");
  run.threads = static_cast<int>(section.integer("threads", 0, 0));
  run.seed = static_cast<std::uint64_t>(section.integer("seed", 1, 0));
  run.blind = section.flag("blind", false);
  run.blind_given = section.has("blind");
  run.phrase = section.text("phrase", run.name);
  section.done();
}

void read_template_section(RunSection section, RunFile& run) {
  run.template_file = section.path("file");
  section.done();
}

void read_passbands_section(RunSection section, RunFile& run) {
  run.passband_catalogue = section.path("catalogue");
  run.standard_star = section.optional_path("standard_star");
  section.done();
}

void read_survey_section(RunSection section, RunFile& run) {
  SurveyInput survey;
  survey.name = section.text("name");
  survey.photometry = section.path("photometry");
  survey.supernovae = section.path("supernovae");
  survey.error_scale = read_error_scale(section);
  section.done();
  for (const SurveyInput& other : run.surveys) {
    if (other.name == survey.name) {
      throw InputError(section.place("name"), fmt::format("two surveys are called {}", survey.name),
                       "give each a name of its own");
    }
  }
  run.surveys.push_back(std::move(survey));
}

}  // namespace thirdrung
