#include <catch2/catch.hpp>
#include <cmath>
#include <random>
#include <set>

#include "sample/quality_cuts.h"

using namespace thirdrung;

namespace {

using Settings = std::vector<std::pair<std::string, std::string>>;

CutSubject good() {
  CutSubject s;
  s.supernova = "sn-a";
  s.s = 1.0;
  s.c = 0.05;
  s.t_0_error = 0.2;
  s.m_b_error = 0.04;
  s.s_error = 0.02;
  s.c_error = 0.03;
  s.first_phase = -5.0;
  s.last_phase = 40.0;
  s.mw_ebv = 0.05;
  s.z_flow = 0.05;
  s.fit_probability = 0.4;
  s.bands = 4;
  s.epochs = 40;
  s.host_log_mass = 10.5;
  return s;
}

std::vector<std::string> removers(const CutSubject& subject, const CutLimits& limits = {}) {
  const std::vector<CutSubject> one = {subject};
  return apply_cuts(one, cut_rules(limits)).removed_by.at(0);
}

}  // namespace

TEST_CASE("a good supernova passes the defaults") {
  CHECK(removers(good()).empty());
}

TEST_CASE("each default rule removes what it is for, and only that") {
  const auto only = [](auto change, const std::string& rule) {
    CutSubject s = good();
    change(s);
    const auto found = removers(s);
    INFO(rule);
    REQUIRE(found.size() == 1);
    CHECK(found[0] == rule);
  };
  only([](CutSubject& s) { s.c = -0.31; }, "|c| < 0.3");
  only([](CutSubject& s) { s.s = 0.74; }, "s > 0.75");
  only([](CutSubject& s) { s.s = 1.31; }, "s < 1.3");
  only([](CutSubject& s) { s.z_flow = 0.02; }, "z_flow > 0.0233");
  only([](CutSubject& s) { s.z_flow = 0.16; }, "z_flow < 0.15");
  only([](CutSubject& s) { s.trusted = false; }, "fit is trusted");
  only([](CutSubject& s) { s.mw_ebv = 0.3; }, "mw_ebv < 0.2");
  only([](CutSubject& s) { s.first_phase = 8.0; }, "first_phase < 5");
  only([](CutSubject& s) { s.last_phase = 2.0; }, "last_phase > 5");
  only([](CutSubject& s) { s.fit_probability = 1e-5; }, "fit_probability > 0.001");
  only([](CutSubject& s) { s.bands = 1; }, "bands >= 2");
  only([](CutSubject& s) { s.epochs = 4; }, "epochs >= 5");
  only([](CutSubject& s) { s.t_0_error = 2.5; }, "t_0_error < 2");
  only([](CutSubject& s) { s.s_error = 0.2; }, "s_error < 0.15");
  only([](CutSubject& s) { s.c_error = 0.2; }, "c_error < 0.15");
  only([](CutSubject& s) { s.c = missing_value; }, "|c| < 0.3");
}

TEST_CASE("a missing host mass matters only where it is asked for") {
  CutSubject s = good();
  s.host_log_mass = missing_value;
  CHECK(removers(s).empty());
  CutLimits limits;
  limits.host_mass = true;
  CHECK(removers(s, limits) == std::vector<std::string>{"host mass is known"});
  limits.host_mass = false;
  limits.host_log_mass_min = 10.0;
  CHECK(removers(s, limits).size() == 1);
}

TEST_CASE("counts alone and in order are those of plain set arithmetic") {
  std::mt19937 random(7);
  std::normal_distribution<double> normal(0.0, 1.0);
  std::vector<CutSubject> subjects(500, good());
  for (CutSubject& s : subjects) {
    s.c = 0.2 * normal(random);
    s.s = 1.0 + 0.2 * normal(random);
    s.z_flow = 0.08 + 0.05 * normal(random);
  }
  const auto rules = cut_rules({});
  const CutResult result = apply_cuts(subjects, rules);
  std::set<std::size_t> left;
  for (std::size_t i = 0; i < subjects.size(); ++i) left.insert(i);
  for (std::size_t r = 0; r < rules.size(); ++r) {
    std::size_t alone = 0;
    std::size_t in_order = 0;
    for (std::size_t i = 0; i < subjects.size(); ++i) {
      if (rules[r].keeps(subjects[i])) continue;
      ++alone;
      in_order += left.erase(i);
    }
    CHECK(result.counts[r].removed_alone == alone);
    CHECK(result.counts[r].removed_in_order == in_order);
    CHECK(result.counts[r].left == left.size());
  }
  for (std::size_t i = 0; i < subjects.size(); ++i) {
    CHECK(result.used[i] == (left.count(i) == 1));
    CHECK(result.used[i] == result.removed_by[i].empty());
    CHECK(result.used[i] == result.first_rule(i).empty());
  }
  const Table table = cuts_table(result);
  CHECK(table.rows() == rules.size());
  CHECK(table.integers("left").back() == static_cast<std::int64_t>(left.size()));
}

TEST_CASE("a supernova that fails several rules names them all") {
  CutSubject s = good();
  s.c = 0.5;
  s.s = 0.6;
  const std::vector<CutSubject> one = {s};
  const CutResult result = apply_cuts(one, cut_rules({}));
  CHECK(result.first_rule(0) == "|c| < 0.3");
  CHECK(result.all_rules(0) == "|c| < 0.3; s > 0.75");
}

TEST_CASE("limits are set from keys and values, and given back") {
  const Settings settings = {{"c_max", "0.2"}, {"z_max", "off"}, {"host_mass", "true"}, {"bands_min", "3"}};
  const CutLimits limits = cut_limits_from(settings, {"run.toml", 12, ""});
  CHECK(limits.c_max == 0.2);
  CHECK_FALSE(limits.z_max);
  CHECK(limits.host_mass);
  CHECK(limits.bands_min == 3.0);
  CHECK(limits.s_min == 0.75);
  const auto given_back = cut_settings(limits);
  CHECK(given_back.size() == cut_names().size());
  CHECK(cut_settings(cut_limits_from(given_back, {})) == given_back);
}

TEST_CASE("bad limits are refused with their place and remedy") {
  const Place place{"run.toml", 12, ""};
  const auto refuse = [&](const Settings& settings, const std::string& words) {
    CHECK_THROWS_WITH(cut_limits_from(settings, place), Catch::Contains(words) && Catch::Contains("run.toml"));
  };
  refuse({{"c_mx", "0.3"}}, "c_max");
  refuse({{"c_max", "wide"}}, "'wide'");
  refuse({{"c_max", "0.3 mag"}}, "'0.3 mag'");
  refuse({{"c_max", "nan"}}, "'nan'");
  refuse({{"trusted", "maybe"}}, "'maybe'");
  refuse({{"z_min", "0.2"}}, "z_min of 0.2");
}
