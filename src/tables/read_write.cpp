#include "tables/read_write.h"

#include <fmt/format.h>

#include <fstream>
#include <string>
#include <string_view>

#include "base/atomic_file.h"
#include "base/text.h"
#include "tables/csv.h"
#include "tables/ecsv.h"
#include "tables/ecsv_header.h"
#include "tables/fits_handle.h"
#include "tables/fits_table.h"
#include "tables/gzip.h"

namespace thirdrung {

namespace {

enum class Kind { ecsv, csv, fits, fits_gz, unknown };

Kind kind_by_name(const std::filesystem::path& path) {
  const std::string name = path.filename().string();
  for (const auto& [ending, kind] : {std::pair<std::string_view, Kind>{".ecsv", Kind::ecsv},
                                     {".csv", Kind::csv},
                                     {".fits", Kind::fits},
                                     {".fit", Kind::fits},
                                     {".fits.gz", Kind::fits_gz}}) {
    if (name.size() > ending.size() && name.ends_with(ending)) return kind;
  }
  return Kind::unknown;
}

/// First bytes of the file; none if it cannot be read, which reading it whole then says.
std::string front_of(const std::filesystem::path& path) {
  std::string front(16, '\0');
  std::ifstream in(path, std::ios::binary);
  in.read(front.data(), static_cast<std::streamsize>(front.size()));
  front.resize(static_cast<std::size_t>(in.gcount()));
  return front;
}

/// The mark that some editors put before UTF-8 text.
std::string_view without_byte_order_mark(std::string_view text) {
  constexpr std::string_view mark = "\xEF\xBB\xBF";
  return text.starts_with(mark) ? text.substr(mark.size()) : text;
}

}  // namespace

Table read_table(const std::filesystem::path& path) {
  const std::string file = path.string();
  const Kind kind = kind_by_name(path);
  const std::string front = front_of(path);
  if (kind == Kind::fits || kind == Kind::fits_gz || looks_like_fits(front) || looks_like_gzip(front)) {
    std::string content = read_file(path);
    if (content.empty()) throw InputError({file, {}, {}}, "is empty", "give a table");
    return parse_fits_table(std::move(content), file);
  }
  const std::string content = read_text_file(path);
  if (content.empty()) throw InputError({file, {}, {}}, "is empty", "give a table");
  const std::string_view text = without_byte_order_mark(content);
  if (kind == Kind::ecsv || looks_like_ecsv(text)) return parse_ecsv(text, file);
  if (kind == Kind::csv) return parse_csv(text, file);
  throw InputError({file, {}, {}}, "is not a table of a kind that is read here",
                   "give ECSV, CSV or FITS, named .ecsv, .csv, .fits or .fits.gz");
}

void write_table(const Table& table, const std::filesystem::path& path) {
  switch (kind_by_name(path)) {
    case Kind::ecsv:
      return write_file_atomically(path, format_ecsv(table));
    case Kind::csv:
      return write_file_atomically(path, format_csv(table));
    case Kind::fits:
      return write_file_atomically(path, format_fits_table(table, ""));
    case Kind::fits_gz:
      return write_file_atomically(path, gzip(format_fits_table(table, "")));
    case Kind::unknown:
      break;
  }
  throw OutputError(
      fmt::format("{}: cannot be written: its name ends in none of .ecsv, .csv, .fits, .fits.gz.", path.string()));
}

}  // namespace thirdrung
