#include <catch2/catch.hpp>

#include "base/error.h"
#include "pipeline/simulation_file.h"
#include "tables/scratch_folder.h"

using namespace thirdrung;
using namespace thirdrung::testing;

namespace {

const std::string sound = R"(seed = 7
[relation]
beta = 2.5
[[passband]]
id = "p"
centre = 5000
width = 900
[[survey]]
name = "one"
passbands = ["p"]
depth = [20.5]
)";

std::string complaint(const std::string& content) {
  const ScratchFolder folder;
  const auto path = folder.file("s.toml", content);
  return message_of<InputError>([&] { read_simulation_file(path); });
}

bool says(const std::string& message, const std::string& part) {
  CAPTURE(message);
  return message.find(part) != std::string::npos;
}

}  // namespace

TEST_CASE("a simulation file sets what it names and leaves the rest") {
  const ScratchFolder folder;
  const SimulationOptions options = read_simulation_file(folder.file("s.toml", sound));
  CHECK(options.seed == 7);
  CHECK(options.relation.beta == 2.5);
  CHECK(options.relation.alpha == SimulatedRelation().alpha);
  REQUIRE(options.surveys.size() == 1);
  CHECK(options.surveys[0].bands[0].depth == 20.5);
  CHECK(options.surveys[0].cadence == SimulatedSurvey().cadence);
}

TEST_CASE("the demo's simulation file is read") {
  const SimulationOptions options =
      read_simulation_file(std::string(THIRDRUNG_SOURCE_DIR) + "/demo-lightcurves/simulation.toml");
  CHECK(options.surveys.size() == 2);
  CHECK(options.passbands.size() == 7);
}

TEST_CASE("what a simulation file gets wrong is named with its line") {
  CHECK(says(complaint("sed = 7\n" + sound), "did you mean \"seed\""));
  CHECK(says(complaint(sound + "cadense = 3\n"), "did you mean \"cadence\""));
  CHECK(says(complaint(sound + "cadense = 3\n"), "s.toml"));
  CHECK(says(complaint(sound + "z_min = \"near\"\n"), "z_min"));
  CHECK(says(complaint("[[survey]]\nname = \"one\"\npassbands = [\"p\"]\ndepth = []\n"), "1 passbands and 0 depths"));
  CHECK(says(complaint("[[passband]]\nid = \"p\"\nwidth = 900\n"), "lacks the key centre"));
  CHECK(says(complaint("relation = 3\n"), "relation is not a section"));
  CHECK(says(complaint("survey = 3\n"), "survey is not a list"));
  CHECK(says(complaint("seed = \n"), "mend the TOML"));
  CHECK(says(complaint(sound + "z_max = 0.005\n"), "z_min of survey \"one\""));
}

TEST_CASE("calibrators are simulated where a section asks for them") {
  const ScratchFolder folder;
  CHECK(read_simulation_file(folder.file("s.toml", sound)).calibrators.supernovae == 0);
  const SimulationOptions options = read_simulation_file(folder.file(
      "c.toml", sound + "[calibrators]\nsupernovae = 6\nshared_hosts = 2\nsurveys = [\"one\"]\ncommon_error = 0.03\n"));
  CHECK(options.calibrators.supernovae == 6);
  CHECK(options.calibrators.shared_hosts == 2);
  CHECK(options.calibrators.common_error == 0.03);
  CHECK(says(complaint(sound + "[calibrators]\nsupernovae = 3\nshared_hosts = 2\n"), "shared_hosts of [calibrators]"));
  CHECK(says(complaint(sound + "[calibrators]\nsurveys = [\"onr\"]\n"), "did you mean \"one\""));
}
