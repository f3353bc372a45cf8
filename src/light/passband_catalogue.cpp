#include "light/passband_catalogue.h"

#include <fmt/format.h>
#include <fmt/ranges.h>
#include <toml++/toml.h>

#include <array>
#include <cmath>
#include <stdexcept>

#include "base/constants.h"
#include "base/text.h"
#include "tables/read_write.h"

namespace thirdrung {

namespace {

const std::vector<std::string> known_keys = {
    "id", "file", "response", "system", "zero_point", "ab_offset", "zero_point_error", "wavelength_error", "source"};

std::string suggestion(const std::string& word, const std::vector<std::string>& known) {
  const std::string near = nearest_word(word, known);
  return near.empty() ? fmt::format("known: {}", fmt::join(known, ", ")) : fmt::format("did you mean \"{}\"?", near);
}

/// One [[passband]] of the file, with what its errors need.
struct Entry {
  const toml::table& keys;
  std::string file;
  std::string id;

  Place place(const std::string& key) const {
    const toml::node* node = keys.get(key);
    const auto line = node ? node->source().begin.line : keys.source().begin.line;
    return {file, std::size_t{line}, key};
  }

  std::string what() const { return id.empty() ? "a passband" : fmt::format("passband {}", id); }

  std::string text(const std::string& key) const {
    if (!keys.contains(key)) throw InputError(place(key), fmt::format("{} has no {}", what(), key), "give one");
    const auto value = keys[key].value_exact<std::string>();
    if (!value || value->empty())
      throw InputError(place(key), fmt::format("{} of {} is not a text", key, what()), "put it in quotes");
    return *value;
  }

  std::optional<double> number(const std::string& key) const {
    if (!keys.contains(key)) return std::nullopt;
    const auto value = keys[key].is_number() ? keys[key].value<double>() : std::nullopt;
    if (!value || !std::isfinite(*value)) {
      throw InputError(place(key), fmt::format("{} of {} is not a finite number", key, what()),
                       "give one, without quotes");
    }
    return value;
  }

  double error(const std::string& key) const {
    const double value = number(key).value_or(0.0);
    if (value < 0)
      throw InputError(place(key), fmt::format("negative {} {} of {}", key, value, what()),
                       "give an error of at least 0");
    return value;
  }

  std::string choice(const std::string& key, const std::vector<std::string>& allowed) const {
    std::string word = text(key);
    for (const std::string& candidate : allowed) {
      if (word == candidate) return word;
    }
    throw InputError(place(key), fmt::format("unknown {} \"{}\" of {}", key, word, what()), suggestion(word, allowed));
  }
};

Passband read_curve(const Entry& entry, const std::filesystem::path& folder) {
  const std::string file = entry.text("file");
  const std::string response = entry.choice("response", {"photon", "energy"});
  const std::filesystem::path path = folder / file;
  std::error_code ignored;
  if (!std::filesystem::exists(path, ignored)) {
    throw InputError(entry.place("file"), fmt::format("{} of {} does not exist", path.string(), entry.what()),
                     "give the curve's name relative to the catalogue's folder");
  }
  const Table table = read_table(path);
  const auto stated = table.meta("response");
  if (stated && *stated != response) {
    throw InputError(entry.place("response"),
                     fmt::format("response \"{}\" of {}, but {} says of itself \"{}\"", response, entry.what(),
                                 path.string(), *stated),
                     "make the two agree");
  }
  return {entry.id, table.reals_in("wavelength", "Angstrom"), table.reals("throughput"),
          response == "energy" ? Response::energy : Response::photon, path.string()};
}

/// AB magnitude of the standard star, which must cover the passband but for a thousandth of its photons.
double standard_star_magnitude(const Entry& entry, const Passband& passband, const std::optional<Spectrum>& star) {
  if (!star) {
    throw InputError(entry.place("system"),
                     fmt::format("{} needs the spectrum of the standard star, and none is given", entry.what()),
                     "name its file in the run file");
  }
  const auto [blue, red] = passband.core_range(0.001);
  if (star->wavelength.empty() || star->wavelength.front() > blue || star->wavelength.back() < red) {
    throw InputError(entry.place("system"),
                     fmt::format("{} reaches from {:.0f} to {:.0f} Angstrom, beyond the spectrum of the standard star",
                                 entry.what(), blue, red),
                     "give a spectrum that covers it");
  }
  const double magnitude = ab_magnitude(*star, passband);
  if (!std::isfinite(magnitude)) {
    throw InputError(entry.place("system"), fmt::format("the standard star has no light in {}", entry.what()),
                     "give its spectrum");
  }
  return magnitude;
}

CalibratedPassband read_entry(const Entry& entry, const std::filesystem::path& folder,
                              const std::optional<Spectrum>& star) {
  for (const auto& [key, node] : entry.keys) {
    const std::string word(key.str());
    bool known = false;
    for (const std::string& candidate : known_keys) known = known || word == candidate;
    if (!known)
      throw InputError(entry.place(word), fmt::format("unknown key \"{}\" of {}", word, entry.what()),
                       suggestion(word, known_keys));
  }
  const std::string system = entry.choice("system", {"AB", "vega", "synthetic"});
  const std::optional<double> zero_point = entry.number("zero_point");
  if (system == "synthetic" && !zero_point) {
    throw InputError(entry.place("zero_point"), fmt::format("{} is \"synthetic\" but has no zero_point", entry.what()),
                     "give the magnitude of one photon per second and square centimetre");
  }
  if (system != "synthetic" && zero_point) {
    throw InputError(entry.place("zero_point"),
                     fmt::format("zero_point of {} has no meaning in the system \"{}\"", entry.what(), system),
                     "leave it out or use the system \"synthetic\"");
  }

  CalibratedPassband result{read_curve(entry, folder)};
  if (system == "vega") {
    result.system = MagnitudeSystem::standard;
    result.ab_magnitude_of_zero = standard_star_magnitude(entry, result.passband, star);
  } else if (system == "synthetic") {
    result.system = MagnitudeSystem::synthetic;
    result.ab_magnitude_of_zero = 2.5 * std::log10(result.passband.photon_rate_ab_zero()) - *zero_point;
  }
  result.ab_offset = entry.number("ab_offset").value_or(0.0);
  result.zero_point_error = entry.error("zero_point_error");
  result.wavelength_error = entry.error("wavelength_error");
  if (entry.keys.contains("source")) result.source = entry.text("source");
  return result;
}

toml::table parse(const std::filesystem::path& path) {
  const std::string content = read_text_file(path);
  try {
    return toml::parse(content, path.string());
  } catch (const toml::parse_error& fault) {
    throw InputError({path.string(), std::size_t{fault.source().begin.line}, {}}, std::string(fault.description()),
                     "mend the TOML there");
  }
}

}  // namespace

PassbandCatalogue PassbandCatalogue::read(const std::filesystem::path& path,
                                          const std::optional<Spectrum>& standard_star) {
  const toml::table file = parse(path);
  for (const auto& [key, node] : file) {
    const std::string word(key.str());
    if (word != "passband") {
      throw InputError({path.string(), std::size_t{node.source().begin.line}, word},
                       fmt::format("unknown key \"{}\"", word), "a catalogue holds [[passband]] entries alone");
    }
  }
  const toml::array* list = file["passband"].as_array();
  if (list == nullptr || list->empty())
    throw InputError({path.string(), {}, {}}, "no [[passband]] entry", "give at least one");

  PassbandCatalogue catalogue;
  catalogue.origin_ = path.string();
  for (const toml::node& node : *list) {
    const toml::table* keys = node.as_table();
    if (keys == nullptr) {
      throw InputError({path.string(), std::size_t{node.source().begin.line}, "passband"}, "an entry is not a table",
                       "write [[passband]]");
    }
    Entry entry{*keys, path.string(), {}};
    entry.id = entry.text("id");
    if (catalogue.has(entry.id)) {
      throw InputError(entry.place("id"), fmt::format("passband {} is given twice", entry.id), "leave one of them out");
    }
    catalogue.add(read_entry(entry, path.parent_path(), standard_star));
  }
  return catalogue;
}

void PassbandCatalogue::add(CalibratedPassband entry) {
  const std::string id = entry.passband.id();
  if (!entries_.emplace(id, std::move(entry)).second) throw std::logic_error("passband " + id + " added twice");
}

const CalibratedPassband& PassbandCatalogue::at(const std::string& id, const Place& place) const {
  const auto found = entries_.find(id);
  if (found != entries_.end()) return found->second;
  const std::string near = nearest_word(id, ids());
  const std::string where = origin_.empty() ? "the catalogue" : origin_;
  throw InputError(place, fmt::format("unknown passband \"{}\"", id),
                   near.empty() ? fmt::format("give it an entry in {}", where)
                                : fmt::format("did you mean \"{}\"? Otherwise give it an entry in {}", near, where));
}

std::vector<std::string> PassbandCatalogue::ids() const {
  std::vector<std::string> names;
  for (const auto& [id, entry] : entries_) names.push_back(id);
  return names;
}

}  // namespace thirdrung
