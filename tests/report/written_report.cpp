#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>

#include "base/text.h"
#include "report/figures.h"
#include "report/page.h"
#include "report/summary_text.h"
#include "tables/read_write.h"

using namespace thirdrung;

namespace {

struct Folder {
  std::filesystem::path path = std::filesystem::temp_directory_path() /
                               ("thirdrung-report-" + std::to_string(reinterpret_cast<std::uintptr_t>(this)));
  Folder() { std::filesystem::create_directories(path); }
  ~Folder() { std::filesystem::remove_all(path); }
  void write(const std::string& name, const std::string& content) const { std::ofstream(path / name) << content; }
};

std::string message_of(const std::function<void()>& action) {
  try {
    action();
  } catch (const InputError& fault) {
    return fault.what();
  }
  return "";
}

}  // namespace

TEST_CASE("a folder without results is named", "[report]") {
  const Folder folder;
  const std::string message = message_of([&] { summary_text({folder.path}); });
  CHECK(message.find(folder.path.string()) != std::string::npos);
  CHECK(message.find("output folder of a run") != std::string::npos);
  CHECK(message_of([&] { write_figures({folder.path, folder.path / "figures"}); }) == message);
}

TEST_CASE("an absent chart library is named with its Debian package", "[report]") {
  const Folder folder;
  folder.write("summary.json", "{}");
  PageOptions options;
  options.folder = folder.path;
  options.vega_folder = folder.path / "nowhere";
  const std::string message = message_of([&] { write_page(options); });
  CHECK(message.find("libjs-vega") != std::string::npos);
  CHECK(!std::filesystem::exists(folder.path / "report.html"));
}

TEST_CASE("a summary that is no JSON is refused, one of odd types is taken for what it tells", "[report]") {
  const Folder folder;
  folder.write("summary.json", "{\"a_b\": ");
  CHECK(message_of([&] { summary_text({folder.path}); }).find("summary.json") != std::string::npos);
  folder.write("summary.json", "[1]");
  CHECK(message_of([&] { summary_text({folder.path}); }).find("summary.json") != std::string::npos);
  folder.write(
      "summary.json",
      R"({"a_b": {"value": "x", "blind": "no"}, "cuts": [1, {"rule": 3}], "warnings": 7, "inputs": {}, "supernovae": null})");
  CHECK(summary_text({folder.path}).find("no intercept") != std::string::npos);
}

TEST_CASE("the terminal summary says what summary.json holds, and no file steers the terminal", "[report]") {
  const Folder folder;
  folder.write(
      "summary.json",
      R"({"a_b": {"value": 0.714480, "error": 0.0028, "error_stat": 0.0024, "error_sys": 0.0015, "blind": true},
    "supernovae": 217, "scatter_mag": 0.1314, "cuts": [{"rule": "|c| < 0.3", "removed_alone": 4, "removed_in_order": 3, "left": 217}],
    "warnings": ["colour\u001b[31m of \u009b2J the terminal"], "version": "thirdrung 0.1.0"})");
  const std::string text = summary_text({folder.path});
  CHECK(text.find("a_B = 0.7145 ± 0.0024 (stat) ± 0.0015 (sys)  [blind]") != std::string::npos);
  CHECK(text.find("217") != std::string::npos);
  CHECK(text.find("0.131 mag") != std::string::npos);
  CHECK(text.find("hidden offset") != std::string::npos);
  CHECK(text.find("|c| < 0.3") != std::string::npos);
  CHECK(text.find('\x1b') == std::string::npos);
  CHECK(text.find("\xC2\x9B") == std::string::npos);
  CHECK(text.find("colour?[31m of ?2J the terminal") != std::string::npos);
}

TEST_CASE("text that would end the page's script stays data", "[report]") {
  if (!std::filesystem::exists(std::filesystem::path(debian_vega_folder) / "vega-util.min.js")) return;
  const Folder folder;
  Table table("test");
  table.add_strings("supernova", {"</script><script>alert(1)</script>", "<!--", "\xE2\x80\xA8 line"});
  table.add_reals("z_helio", {0.03, 0.04, 0.05});
  write_table(table, folder.path / "lightcurve-fits.ecsv");
  PageOptions options;
  options.folder = folder.path;
  options.title = "{{script}} </title><script>alert(2)</script>";
  const PageResult result = write_page(options);
  const std::string page = read_file(result.page);
  CHECK(page.size() == result.bytes);
  CHECK(page.find("<script>alert") == std::string::npos);
  CHECK(page.find("<!--") == std::string::npos);
  CHECK(page.find("\\u003c/script\\u003e") != std::string::npos);
  CHECK(page.find("<title>{{script}} &lt;/title&gt;") != std::string::npos);
}
