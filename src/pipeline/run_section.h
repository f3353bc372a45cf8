#pragma once

#include <toml++/toml.h>

#include <cstdint>
#include <optional>
#include <set>
#include <span>
#include <string>
#include <vector>

#include "base/error.h"
#include "pipeline/input_file.h"

namespace thirdrung {

/// A TOML text as a table; throws InputError at the line of `file` that is not TOML.
toml::table parse_toml(const std::string& text, const std::string& file);

/// One section of a TOML file, read strictly.
///
/// Each getter notes the key that it was asked for; done() then refuses every key that nobody asked for, with the
/// nearest of those that are known. All errors are InputError with file, line and key.
class RunSection {
 public:
  /// @param name of the section, "[cuts]"; for messages.
  RunSection(const toml::table& keys, std::string file, std::string name);
  /// A section that the file lacks: every getter gives its default.
  RunSection(std::string file, std::string name);

  Place place(const std::string& key) const;
  bool has(const std::string& key) const;
  bool is_flag(const std::string& key) const;
  bool is_list(const std::string& key) const;
  bool is_table(const std::string& key) const;
  const std::string& name() const { return name_; }

  std::string text(const std::string& key);
  std::string text(const std::string& key, const std::string& otherwise);
  std::optional<std::string> optional_text(const std::string& key);
  double number(const std::string& key, double otherwise);
  std::optional<double> optional_number(const std::string& key);
  /// Leaves `value` as it is if the key is absent.
  void read_number(const std::string& key, double& value) { value = number(key, value); }
  std::int64_t integer(const std::string& key, std::int64_t otherwise, std::int64_t least);
  bool flag(const std::string& key, bool otherwise);
  /// A number in [low, high].
  double number_between(const std::string& key, double otherwise, double low, double high);
  std::vector<double> numbers(const std::string& key);
  std::vector<std::string> texts(const std::string& key);
  /// One of `allowed`; the first if the key is absent.
  std::string choice(const std::string& key, std::span<const std::string> allowed);
  /// A path, relative to the folder of the file; ${NAME} stands for an environment variable.
  InputFile path(const std::string& key);
  InputFile optional_path(const std::string& key);
  /// The same for a path that stands in a list.
  InputFile path_of(const std::string& key, const std::string& written) const;
  /// The value as it would be written without quotes: text, number or truth value.
  std::string plain(const std::string& key);
  /// A table inside this one, with keys of its own.
  RunSection inside(const std::string& key);

  std::vector<std::string> keys() const;
  /// Notes keys as known without reading them.
  void know(std::span<const std::string> keys);
  /// Refuses what nobody asked for.
  void done() const;

 private:
  const toml::node* find(const std::string& key);
  [[noreturn]] void wrong_kind(const std::string& key, const std::string& what) const;
  [[noreturn]] void unknown(const std::string& key) const;

  const toml::table* keys_ = nullptr;
  std::string file_;
  std::string name_;
  std::set<std::string> known_;
};

}  // namespace thirdrung
