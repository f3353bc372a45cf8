#include "tables/read_write.h"

#include <fmt/format.h>

#include <stdexcept>
#include <string>

#include "base/atomic_file.h"
#include "base/text.h"
#include "tables/ecsv.h"

namespace thirdrung {

Table read_table(const std::filesystem::path& path) {
  return parse_ecsv(read_text_file(path), path.string());
}

void write_table(const Table& table, const std::filesystem::path& path) {
  write_file_atomically(path, format_ecsv(table));
}

}  // namespace thirdrung
