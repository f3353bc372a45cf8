#include "report/summary_text.h"

#include <fmt/format.h>

#include <algorithm>

#include "report/answer.h"
#include "report/run_tables.h"

namespace thirdrung {
namespace {

/// Characters, not bytes: a continuation byte of UTF-8 takes no column.
std::size_t columns(const std::string& text) {
  return static_cast<std::size_t>(
      std::count_if(text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0U) != 0x80U; }));
}

std::string padded(const std::string& text, std::size_t width) {
  const std::size_t taken = columns(text);
  return text + std::string(taken < width ? width - taken : 0, ' ');
}

/// Replaces control characters (also the two-byte ones, U+0080 to U+009F), which could move the cursor or recolour the
/// terminal.
std::string harmless(const std::string& text) {
  std::string result;
  for (std::size_t i = 0; i < text.size(); ++i) {
    const auto byte = static_cast<unsigned char>(text[i]);
    const bool second_set = byte == 0xC2U && i + 1 < text.size() && static_cast<unsigned char>(text[i + 1]) < 0xA0U;
    if (second_set) ++i;
    if (second_set || byte < 0x20U || byte == 0x7FU)
      result += '?';
    else
      result += text[i];
  }
  return result;
}

/// Breaks at blanks; the first line starts with `mark`, the others are set in below it.
void wrap(const std::string& text, const std::string& mark, std::size_t width, std::string& out) {
  const std::string inset(columns(mark), ' ');
  std::string line = mark;
  std::size_t from = 0;
  bool fresh = true;
  while (from < text.size()) {
    const std::size_t blank = std::min(text.find(' ', from), text.size());
    const std::string word = text.substr(from, blank - from);
    if (!fresh && columns(line) + 1 + columns(word) > width) {
      out += line + "\n";
      line = inset;
      fresh = true;
    }
    line += (fresh ? "" : " ") + word;
    fresh = false;
    from = blank + 1;
  }
  out += line + "\n";
}

void add_cuts(const RunSummary& summary, std::string& out) {
  if (summary.cuts.empty()) return;
  std::size_t widest = 4;
  for (const CutLine& cut : summary.cuts) widest = std::max(widest, columns(harmless(cut.rule)));
  widest = std::min<std::size_t>(widest, 60);
  out += fmt::format("\n{}   alone  removed   left\n", padded("  cuts, in order", widest + 2));
  for (const CutLine& cut : summary.cuts) {
    out += fmt::format("  {}  {:>6}  {:>7}  {:>5}\n", padded(harmless(cut.rule), widest), cut.removed_alone,
                       cut.removed_in_order, cut.left);
  }
}

}  // namespace

std::string summary_text(const SummaryTextOptions& options) {
  const RunTables run = read_run_tables(options.folder);
  const Answer answer = make_answer(run);
  const auto width = static_cast<std::size_t>(std::max(40, options.width));
  std::string out = answer_line(answer) + "\n";
  if (!answer.hubble_constant.empty()) out += "H0  = " + answer.hubble_constant + " km/s/Mpc\n";
  if (!answer.absolute_magnitude.empty()) out += "M_B = " + answer.absolute_magnitude + "\n";
  std::string facts;
  for (const auto& [label, value] : answer.facts)
    facts += fmt::format("{}{} {}", facts.empty() ? "" : ", ", label, value);
  if (!facts.empty()) wrap(harmless(facts), "", width, out);
  if (!answer.qualifications.empty()) out += "\n";
  for (const std::string& sentence : answer.qualifications) wrap(harmless(sentence), "  ", width, out);
  add_cuts(run.summary, out);
  if (!answer.warnings.empty()) out += "\n";
  for (const std::string& warning : answer.warnings) wrap(harmless(warning), "  ! ", width, out);
  if (!run.summary.version.empty())
    out += fmt::format("\n{}, {}\n", harmless(run.summary.version), harmless(options.folder.string()));
  return out;
}

}  // namespace thirdrung
