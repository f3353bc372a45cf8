// Reads a table and writes it again, for the Python checks:  convert_table <from> <to> [blanks]
// "blanks" writes ECSV delimited by blanks. Errors go to stderr; exit code 3 for bad input, 4 for a failed write.
#include <cstdio>
#include <string>
#include <string_view>

#include "base/atomic_file.h"
#include "tables/ecsv.h"
#include "tables/read_write.h"

int main(int argc, char** argv) {
  using namespace thirdrung;
  if (argc < 3) return static_cast<int>(ExitCode::usage);
  try {
    const Table table = read_table(argv[1]);
    if (argc > 3 && std::string_view(argv[3]) == "blanks") {
      write_file_atomically(argv[2], format_ecsv(table, ' '));
    } else {
      write_table(table, argv[2]);
    }
  } catch (const InputError& error) {
    std::fprintf(stderr, "%s\n", error.what());
    return static_cast<int>(ExitCode::input);
  } catch (const OutputError& error) {
    std::fprintf(stderr, "%s\n", error.what());
    return static_cast<int>(ExitCode::output);
  }
  return 0;
}
