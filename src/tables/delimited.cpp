#include "tables/delimited.h"

#include <fmt/format.h>

#include <algorithm>

#include "base/error.h"
#include "tables/cells.h"

namespace thirdrung {

RecordReader::RecordReader(std::string_view text, char delimiter, std::string file, std::size_t first_line)
    : text_(text), delimiter_(delimiter), file_(std::move(file)), line_(first_line), record_line_(first_line) {}

void RecordReader::fail(const std::string& fault, const std::string& remedy) const {
  throw InputError({file_, {}, {}}, fmt::format("line {}: {}", record_line_, fault), remedy);
}

void RecordReader::skip_blanks() {
  while (at_ < text_.size() && (text_[at_] == ' ' || (text_[at_] == '\t' && delimiter_ != '\t'))) ++at_;
}

bool RecordReader::skip_to_record() {
  while (at_ < text_.size()) {
    const std::size_t end = std::min(text_.find('\n', at_), text_.size());
    const std::string_view content = trimmed(text_.substr(at_, end - at_));
    if (!content.empty() && content.front() != '#') return true;
    at_ = std::min(end + 1, text_.size());
    ++line_;
  }
  return false;
}

Field RecordReader::quoted_field() {
  const std::size_t start = ++at_;
  std::string* unescaped = nullptr;
  std::size_t piece = start;
  for (;;) {
    const std::size_t quote = text_.find('"', at_);
    if (quote == std::string_view::npos)
      fail("a quote is opened and never closed", "close it, or double a quote that is part of the text");
    line_ += static_cast<std::size_t>(std::count(text_.begin() + static_cast<std::ptrdiff_t>(at_),
                                                 text_.begin() + static_cast<std::ptrdiff_t>(quote), '\n'));
    at_ = quote + 1;
    const bool doubled = at_ < text_.size() && text_[at_] == '"';
    if (!doubled && unescaped == nullptr) return {text_.substr(start, quote - start), true};
    if (unescaped == nullptr) unescaped = &unescaped_.emplace_back();
    unescaped->append(text_.substr(piece, quote - piece));
    if (!doubled) return {*unescaped, true};
    *unescaped += '"';
    piece = ++at_;
  }
}

Field RecordReader::field() {
  skip_blanks();
  if (at_ < text_.size() && text_[at_] == '"') {
    const Field result = quoted_field();
    const std::size_t after = at_;
    skip_blanks();
    if (!at_line_end() && text_[at_] != delimiter_ && !(delimiter_ == ' ' && at_ > after)) {
      fail(fmt::format("something stands behind the closing quote of {}", quoted_for_message(result.text)),
           "double a quote that is part of the text");
    }
    return result;
  }
  const std::size_t start = at_;
  while (!at_line_end() && text_[at_] != delimiter_ && !(delimiter_ == ' ' && text_[at_] == '\t')) ++at_;
  return {trimmed(text_.substr(start, at_ - start)), false};
}

bool RecordReader::next(std::vector<Field>& fields) {
  fields.clear();
  unescaped_.clear();
  if (!skip_to_record()) return false;
  record_line_ = line_;
  for (;;) {
    fields.push_back(field());
    if (delimiter_ == ' ') skip_blanks();
    if (at_line_end()) break;
    if (delimiter_ != ' ') ++at_;  // past the delimiter
  }
  if (at_ < text_.size() && text_[at_] == '\r') ++at_;
  if (at_ < text_.size()) ++at_;
  ++line_;
  return true;
}

void append_field(std::string& record, std::string_view text, char delimiter, bool empty_as_quotes) {
  const auto needs_quotes = [&] {
    if (text.empty()) return empty_as_quotes;
    const auto is_blank = [](char c) { return c == ' ' || c == '\t'; };
    if (is_blank(text.front()) || is_blank(text.back()) || text.front() == '#') return true;
    return text.find_first_of("\"\n\r") != std::string_view::npos || text.find(delimiter) != std::string_view::npos ||
           (delimiter == ' ' && text.find('\t') != std::string_view::npos);
  };
  if (!needs_quotes()) {
    record += text;
    return;
  }
  record += '"';
  for (const char c : text) {
    if (c == '"') record += '"';
    record += c;
  }
  record += '"';
}

}  // namespace thirdrung
