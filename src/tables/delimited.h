#pragma once

#include <cstddef>
#include <deque>
#include <string>
#include <string_view>
#include <vector>

namespace thirdrung {

/// One field of a delimited text table. `text` is without quotes, and without blanks at the ends unless quoted.
struct Field {
  std::string_view text;
  bool quoted = false;
};

/// Splits text into records and fields: RFC 4180 quoting (a doubled quote inside quotes is one; line breaks may stand
/// inside quotes), LF or CRLF line ends. Blank lines and lines that begin with '#' outside quotes are passed over.
/// With ' ' as delimiter, a run of blanks counts as one, and an empty value is written "".
class RecordReader {
 public:
  /// The text must outlive the reader. @param file name for error messages.
  /// @param first_line line of the file on which `text` begins.
  RecordReader(std::string_view text, char delimiter, std::string file, std::size_t first_line = 1);

  /// Fields of the next record, valid until the next call; false at the end. Throws InputError naming the line if a
  /// quote is not closed, or something follows a closing quote.
  bool next(std::vector<Field>& fields);

  /// Line, from 1, on which the record last read begins.
  std::size_t line() const { return record_line_; }

 private:
  bool skip_to_record();
  Field field();
  Field quoted_field();
  bool at_line_end() const { return at_ >= text_.size() || text_[at_] == '\n' || is_crlf(); }
  bool is_crlf() const { return text_[at_] == '\r' && at_ + 1 < text_.size() && text_[at_ + 1] == '\n'; }
  void skip_blanks();
  [[noreturn]] void fail(const std::string& fault, const std::string& remedy) const;

  std::string_view text_;
  char delimiter_;
  std::string file_;
  std::size_t at_ = 0;
  std::size_t line_;
  std::size_t record_line_;
  std::deque<std::string> unescaped_;  ///< Texts of quoted fields that held doubled quotes.
};

/// Appends a field to a record, quoted where reading it back would need it. `empty_as_quotes` writes "" for an empty
/// text: an empty value of a blank-delimited table, or an empty text that is not missing.
void append_field(std::string& record, std::string_view text, char delimiter, bool empty_as_quotes);

}  // namespace thirdrung
