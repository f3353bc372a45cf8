#include "pipeline/run_section.h"

#include <fmt/format.h>
#include <fmt/ranges.h>

#include <cmath>
#include <cstdlib>

#include "base/text.h"

namespace thirdrung {

namespace fs = std::filesystem;

namespace {

/// `written` with every ${NAME} replaced.
std::string expanded(const std::string& written, const Place& place) {
  std::string out;
  std::size_t from = 0;
  while (true) {
    const std::size_t open = written.find("${", from);
    if (open == std::string::npos) return out + written.substr(from);
    const std::size_t close = written.find('}', open);
    if (close == std::string::npos) throw InputError(place, "a ${ without its }", "write ${NAME}");
    const std::string name = written.substr(open + 2, close - open - 2);
    const char* value = std::getenv(name.c_str());
    if (value == nullptr) {
      throw InputError(place, fmt::format("the environment variable {} is not set", name),
                       "set it, or write the path out");
    }
    out += written.substr(from, open - from) + value;
    from = close + 1;
  }
}

}  // namespace

toml::table parse_toml(const std::string& text, const std::string& file) {
  try {
    return toml::parse(text, file);
  } catch (const toml::parse_error& fault) {
    throw InputError({file, std::size_t{fault.source().begin.line}, ""}, std::string(fault.description()),
                     "mend the TOML there");
  }
}

void require_exists(const InputFile& file) {
  std::error_code ignored;
  if (fs::exists(file.path, ignored)) return;
  throw InputError(file.place, fmt::format("there is no file {}", file.path.string()),
                   "mend the path, which counts from the folder of the run file");
}

RunSection::RunSection(const toml::table& keys, std::string file, std::string name)
    : keys_(&keys), file_(std::move(file)), name_(std::move(name)) {}

RunSection::RunSection(std::string file, std::string name) : file_(std::move(file)), name_(std::move(name)) {}

Place RunSection::place(const std::string& key) const {
  if (keys_ == nullptr) return {file_, std::nullopt, key};
  const toml::node* node = keys_->get(key);
  const auto line = node != nullptr ? node->source().begin.line : keys_->source().begin.line;
  return {file_, line > 0 ? std::optional<std::size_t>(line) : std::nullopt, key};
}

bool RunSection::has(const std::string& key) const {
  return keys_ != nullptr && keys_->contains(key);
}

bool RunSection::is_flag(const std::string& key) const {
  return has(key) && keys_->get(key)->is_boolean();
}

bool RunSection::is_list(const std::string& key) const {
  return has(key) && keys_->get(key)->is_array();
}

bool RunSection::is_table(const std::string& key) const {
  return has(key) && keys_->get(key)->is_table();
}

const toml::node* RunSection::find(const std::string& key) {
  known_.insert(key);
  return keys_ == nullptr ? nullptr : keys_->get(key);
}

void RunSection::wrong_kind(const std::string& key, const std::string& what) const {
  throw InputError(place(key), fmt::format("{} of {} is not {}", key, name_, what), fmt::format("give {}", what));
}

std::string RunSection::text(const std::string& key) {
  auto value = optional_text(key);
  if (!value) {
    const std::vector<std::string> wanted = {key};
    for (const std::string& given : keys()) {
      if (!known_.contains(given) && !nearest_word(given, wanted).empty()) unknown(given);
    }
    throw InputError(place(key), fmt::format("{} lacks the key {}", name_, key), "give it");
  }
  return *value;
}

std::string RunSection::text(const std::string& key, const std::string& otherwise) {
  return optional_text(key).value_or(otherwise);
}

std::optional<std::string> RunSection::optional_text(const std::string& key) {
  const toml::node* node = find(key);
  if (node == nullptr) return std::nullopt;
  auto value = node->value_exact<std::string>();
  if (!value || value->empty()) wrong_kind(key, "a text in quotes");
  return value;
}

std::optional<double> RunSection::optional_number(const std::string& key) {
  const toml::node* node = find(key);
  if (node == nullptr) return std::nullopt;
  const auto value = node->is_number() ? node->value<double>() : std::nullopt;
  if (!value || !std::isfinite(*value)) wrong_kind(key, "a finite number without quotes");
  return value;
}

double RunSection::number(const std::string& key, double otherwise) {
  return optional_number(key).value_or(otherwise);
}

double RunSection::number_between(const std::string& key, double otherwise, double low, double high) {
  const double value = number(key, otherwise);
  if (!(value >= low && value <= high)) {
    throw InputError(place(key), fmt::format("{} of {} is {:g}", key, name_, value),
                     fmt::format("give a number from {:g} to {:g}", low, high));
  }
  return value;
}

std::int64_t RunSection::integer(const std::string& key, std::int64_t otherwise, std::int64_t least) {
  const toml::node* node = find(key);
  if (node == nullptr) return otherwise;
  const auto value = node->value_exact<std::int64_t>();
  if (!value || *value < least) wrong_kind(key, fmt::format("a whole number of at least {}", least));
  return *value;
}

bool RunSection::flag(const std::string& key, bool otherwise) {
  const toml::node* node = find(key);
  if (node == nullptr) return otherwise;
  const auto value = node->value_exact<bool>();
  if (!value) wrong_kind(key, "true or false");
  return *value;
}

std::vector<double> RunSection::numbers(const std::string& key) {
  const toml::node* node = find(key);
  std::vector<double> out;
  if (node == nullptr) return out;
  const toml::array* list = node->as_array();
  if (list == nullptr) wrong_kind(key, "a list of numbers, [1.0, 2.0]");
  for (const toml::node& item : *list) {
    const auto value = item.is_number() ? item.value<double>() : std::nullopt;
    if (!value || !std::isfinite(*value)) wrong_kind(key, "a list of numbers, [1.0, 2.0]");
    out.push_back(*value);
  }
  return out;
}

std::vector<std::string> RunSection::texts(const std::string& key) {
  const toml::node* node = find(key);
  std::vector<std::string> out;
  if (node == nullptr) return out;
  const toml::array* list = node->as_array();
  if (list == nullptr) wrong_kind(key, "a list of texts, [\"a\", \"b\"]");
  for (const toml::node& item : *list) {
    const auto value = item.value_exact<std::string>();
    if (!value) wrong_kind(key, "a list of texts, [\"a\", \"b\"]");
    out.push_back(*value);
  }
  return out;
}

std::string RunSection::choice(const std::string& key, std::span<const std::string> allowed) {
  std::string word = text(key, allowed.front());
  for (const std::string& one : allowed) {
    if (word == one) return word;
  }
  const std::string near = nearest_word(word, allowed);
  throw InputError(
      place(key), fmt::format("{} of {} is \"{}\"", key, name_, word),
      near.empty() ? fmt::format("it can be {}", fmt::join(allowed, ", ")) : fmt::format("did you mean \"{}\"?", near));
}

InputFile RunSection::path_of(const std::string& key, const std::string& written) const {
  fs::path path = expanded(written, place(key));
  if (path.is_relative()) path = fs::path(file_).parent_path() / path;
  return {path.lexically_normal(), written, place(key)};
}

InputFile RunSection::path(const std::string& key) {
  return path_of(key, text(key));
}

InputFile RunSection::optional_path(const std::string& key) {
  const auto written = optional_text(key);
  return written ? path_of(key, *written) : InputFile{};
}

std::string RunSection::plain(const std::string& key) {
  const toml::node* node = find(key);
  if (node == nullptr) return "";
  if (const auto value = node->value_exact<std::string>()) return *value;
  if (const auto value = node->value_exact<bool>()) return *value ? "true" : "false";
  if (const auto value = node->is_number() ? node->value<double>() : std::nullopt) return fmt::format("{}", *value);
  wrong_kind(key, "a number, a text or a truth value");
}

RunSection RunSection::inside(const std::string& key) {
  const toml::node* node = find(key);
  const std::string inner = fmt::format("{}.{}", name_, key);
  if (node == nullptr) return {file_, inner};
  const toml::table* table = node->as_table();
  if (table == nullptr) wrong_kind(key, "a table, { key = value }");
  return {*table, file_, inner};
}

std::vector<std::string> RunSection::keys() const {
  std::vector<std::string> out;
  if (keys_ == nullptr) return out;
  for (const auto& [key, node] : *keys_) out.emplace_back(key.str());
  return out;
}

void RunSection::know(std::span<const std::string> keys) {
  known_.insert(keys.begin(), keys.end());
}

void RunSection::unknown(const std::string& key) const {
  const std::vector<std::string> candidates(known_.begin(), known_.end());
  const std::string near = nearest_word(key, candidates);
  throw InputError(
      place(key), fmt::format("{} has no key \"{}\"", name_, key),
      near.empty() ? fmt::format("known: {}", fmt::join(candidates, ", ")) : fmt::format("did you mean \"{}\"?", near));
}

void RunSection::done() const {
  for (const std::string& key : keys()) {
    if (!known_.contains(key)) unknown(key);
  }
}

}  // namespace thirdrung
