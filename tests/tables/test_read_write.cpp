#include <sys/resource.h>

#include <catch2/catch.hpp>
#include <csignal>
#include <filesystem>

#include "base/text.h"
#include "real_data.h"
#include "tables/fits_image.h"
#include "tables/read_write.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using thirdrung::testing::message_of;
using thirdrung::testing::ScratchFolder;

namespace {

const std::string kEcsv = "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: float64}\na\n1.5\n";

Table one_column(std::size_t rows) {
  Table table;
  table.add_reals("x", std::vector<double>(rows, 0.1), "d");
  return table;
}

/// For its lifetime no file can grow beyond `bytes`: writing fails as it does on a full disk.
class NoRoom {
 public:
  explicit NoRoom(rlim_t bytes) : old_handler_(std::signal(SIGXFSZ, SIG_IGN)) {
    getrlimit(RLIMIT_FSIZE, &old_);
    rlimit now = old_;
    now.rlim_cur = bytes;
    setrlimit(RLIMIT_FSIZE, &now);
  }
  ~NoRoom() {
    setrlimit(RLIMIT_FSIZE, &old_);
    std::signal(SIGXFSZ, old_handler_);
  }
  NoRoom(const NoRoom&) = delete;
  NoRoom& operator=(const NoRoom&) = delete;

 private:
  rlimit old_{};
  void (*old_handler_)(int);
};

}  // namespace

TEST_CASE("a table is known by its content before its name") {
  const ScratchFolder folder;
  CHECK(read_table(folder.file("a.txt", kEcsv)).reals("a") == std::vector<double>{1.5});
  CHECK(read_table(folder.file("a.csv", kEcsv)).reals("a") == std::vector<double>{1.5});
  CHECK(read_table(folder.file("mark.ecsv", "\xEF\xBB\xBF" + kEcsv)).reals("a") == std::vector<double>{1.5});
  write_table(one_column(2), folder / "b.fits");
  std::filesystem::copy(folder / "b.fits", folder / "b.dat");
  CHECK(read_table(folder / "b.dat").rows() == 2);
  CHECK(read_table(folder.file("c.csv", "a\n1.5\n")).reals("a") == std::vector<double>{1.5});
}

TEST_CASE("a file that is no table is refused in one sentence") {
  const ScratchFolder folder;
  const auto refusal = [&](const std::string& name, const std::string& content) {
    const auto path = folder.file(name, content);
    const std::string message = message_of<InputError>([&] { read_table(path); });
    REQUIRE(message.starts_with(path.string()));
    return message.substr(path.string().size());
  };
  CHECK(refusal("a.ecsv", "") == ": is empty; give a table.");
  CHECK(refusal("a.ecsv", "x,y\n1,2\n") ==
        ": the first line is not \"# %ECSV 1.0\"; give an ECSV file, or name a plain table .csv.");
  CHECK(refusal("a.txt", "x,y\n1,2\n") ==
        ": is not a table of a kind that is read here; give ECSV, CSV or FITS, named .ecsv, .csv, .fits or .fits.gz.");
  CHECK(refusal("a.fits", "x,y\n") == ": is not a FITS file; give a FITS file, or name the table by its own kind.");
  CHECK(refusal("a.ecsv", kEcsv + "\xFF\n") == ": line 7 is not UTF-8 text; save the file as UTF-8.");
  CHECK(message_of<InputError>([&] { read_table(folder / "absent.ecsv"); }) ==
        (folder / "absent.ecsv").string() +
            ": no such file; check the name, and the folder that names are relative to.");
  CHECK(message_of<InputError>([&] { read_table(folder.path()); }) ==
        folder.path().string() + ": is a folder, not a file; name a file.");
}

TEST_CASE("a full disk leaves the old file and nothing beside it") {
  const ScratchFolder folder;
  for (const char* name : {"t.ecsv", "t.csv", "t.fits"}) {
    CAPTURE(name);
    write_table(one_column(3), folder / name);
    const std::string before = read_file(folder / name);
    const std::size_t entries = folder.entries();
    {
      const NoRoom no_room(8192);
      CHECK(message_of<OutputError>([&] {
              write_table(one_column(20000), folder / name);
            }).starts_with((folder / name).string() + ": cannot be written: "));
    }
    CHECK(read_file(folder / name) == before);
    CHECK(folder.entries() == entries);
  }
}

TEST_CASE("a place that cannot be written is an output error") {
  const ScratchFolder folder;
  const auto file = folder.file("file", "x");
  CHECK_THROWS_AS(write_table(one_column(1), folder / "absent" / "t.ecsv"), OutputError);
  CHECK_THROWS_AS(write_table(one_column(1), file / "t.fits"), OutputError);
  CHECK_THROWS_AS(write_table(one_column(1), folder / "t.unknown"), OutputError);
  CHECK(folder.entries() == 1);
}

TEST_CASE("every published table is read, and comes back the same from ECSV and FITS", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const ScratchFolder folder;
  std::size_t tables = 0;
  for (const auto& entry : std::filesystem::recursive_directory_iterator(data)) {
    if (entry.path().extension() != ".ecsv") continue;
    CAPTURE(entry.path().filename().string());
    const Table table = read_table(entry.path());
    CHECK(table.rows() > 0);
    for (const char* name : {"again.ecsv", "again.fits"}) {
      write_table(table, folder / name);
      const Table again = read_table(folder / name);
      for (const Column& column : table.columns()) CHECK(again.strings(column.name) == table.strings(column.name));
    }
    ++tables;
  }
  CHECK(tables > 50);
}

TEST_CASE("the published spectra are read with their arrays", "[realdata]") {
  THIRDRUNG_NEEDS_REAL_DATA(data);
  const FitsReader reader(data / "spectra" / "spectra.fits.gz");
  const Table rows = reader.table("SPECTRA");
  const FitsImage flux = reader.array_column("SPECTRA", "flux");
  const auto wavelength = reader.table("WAVELENGTH").reals_in("wavelength", "Angstrom");
  CHECK(rows.rows() == 1176);
  CHECK(flux.shape == std::vector<std::size_t>{1176, wavelength.size()});
  CHECK(wavelength[1] - wavelength[0] == 10);
}
