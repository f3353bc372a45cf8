#include "tables/unit_parser.h"

#include <fmt/format.h>

#include <cmath>
#include <cstdlib>
#include <optional>
#include <string_view>

#include "base/text.h"
#include "tables/cells.h"

namespace thirdrung {

namespace {

double power_of(double base, int power) {
  return power == 1 ? base : std::pow(base, power);
}

UnitValue raised(UnitValue unit, int power) {
  unit.mantissa = power_of(unit.mantissa, power);
  unit.exponent *= power;
  for (int& p : unit.dimensions.power) p *= power;
  return unit;
}

void multiply(UnitValue& unit, const UnitValue& by) {
  unit.mantissa *= by.mantissa;
  unit.exponent += by.exponent;
  for (std::size_t i = 0; i < unit.dimensions.power.size(); ++i) unit.dimensions.power[i] += by.dimensions.power[i];
}

/// Recursive descent over  product := term { [ * . / blank ] term },  term := ( number | name | "(" product ")" )
/// power.
class UnitParser {
 public:
  explicit UnitParser(std::string_view text) : text_(text) {}

  ParsedUnit parse() {
    ParsedUnit unit = product();
    if (!done()) throw UnitFault{fmt::format("has an unexpected \"{}\"", text_.substr(at_))};
    return unit;
  }

 private:
  bool done() const { return at_ >= text_.size(); }
  char peek(std::size_t ahead = 0) const { return at_ + ahead < text_.size() ? text_[at_ + ahead] : '\0'; }
  static bool is_digit(char c) { return c >= '0' && c <= '9'; }
  static bool is_name_char(char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || c == '_' || c == '%' ||
           (static_cast<unsigned char>(c) & 0x80) != 0;
  }
  void skip_blanks() {
    while (peek() == ' ') ++at_;
  }

  ParsedUnit product() {
    ParsedUnit result;
    skip_blanks();
    if (peek() == '/') {  // "/ s"
      ++at_;
      join(result, term(), -1);
    } else {
      join(result, term(), 1);
    }
    for (;;) {
      skip_blanks();
      int power = 1;
      if (peek() == '/') {
        power = -1;
        ++at_;
      } else if (peek() == '*' || peek() == '.') {
        ++at_;
      } else if (done() || peek() == ')') {
        return result;
      }
      join(result, term(), power);
    }
  }

  ParsedUnit term() {
    skip_blanks();
    ParsedUnit result;
    if (peek() == '(') {
      ++at_;
      result = product();
      close();
    } else if (is_digit(peek())) {
      result = number();
    } else {
      result = named();
    }
    const int exponent = power();
    ParsedUnit raised_unit;
    raised_unit.has_number = result.has_number;
    raised_unit.value = raised(result.value, exponent);
    for (const Factor& factor : result.factors) raised_unit.factors.push_back({factor.name, factor.power * exponent});
    return raised_unit;
  }

  ParsedUnit number() {
    ParsedUnit result;
    result.has_number = true;
    std::size_t end = at_;
    while (is_digit(peek(end - at_)) || peek(end - at_) == '.') ++end;
    if (peek(end - at_) == 'e' || peek(end - at_) == 'E') {
      std::size_t digits = end + 1;
      if (peek(digits - at_) == '-' || peek(digits - at_) == '+') ++digits;
      if (is_digit(peek(digits - at_))) {
        while (is_digit(peek(digits - at_))) ++digits;
        end = digits;
      }
    }
    const std::string_view digits = text_.substr(at_, end - at_);
    const std::size_t e = digits.find_first_of("eE");
    const auto mantissa = parse_real(digits.substr(0, e));
    const auto exponent =
        e == std::string_view::npos ? std::optional<std::int64_t>(0) : parse_integer(digits.substr(e + 1));
    if (!mantissa || *mantissa <= 0 || !exponent || std::abs(*exponent) > 300) {
      throw UnitFault{fmt::format("has a malformed number \"{}\"", digits)};
    }
    at_ = end;
    result.value.mantissa = *mantissa;
    result.value.exponent = static_cast<int>(*exponent);
    if (*mantissa == 10) {  // "10**-17": kept as a power of ten
      result.value.mantissa = 1;
      result.value.exponent += 1;
    }
    return result;
  }

  ParsedUnit named() {
    std::size_t end = at_;
    while (is_name_char(peek(end - at_))) ++end;
    const std::string name(text_.substr(at_, end - at_));
    if (name.empty()) {
      throw UnitFault{done() ? std::string("ends too early")
                             : fmt::format("has an unexpected \"{}\"", text_.substr(at_))};
    }
    at_ = end;
    ParsedUnit result;
    if (!find_named_unit(name, result.value)) {
      const std::string nearest = nearest_word(name, common_unit_names());
      throw UnitFault{fmt::format("names the unknown unit \"{}\"{}", name,
                                  nearest.empty() ? "" : fmt::format(" (the nearest is \"{}\")", nearest))};
    }
    result.factors.push_back({name, 1});
    if (peek() == '(' && name == "dex") {
      // dex(solMass): the logarithm of a mass in solar masses; what is inside says no more than the column's name.
      ++at_;
      product();
      close();
      result.has_number = true;  // not to be respelled
    } else if (peek() == '(' && name == "mag") {
      throw UnitFault{"ties the magnitude to a system, which the passband states already"};
    }
    return result;
  }

  void close() {
    skip_blanks();
    if (peek() != ')') throw UnitFault{"has an unclosed bracket"};
    ++at_;
  }

  int power() {
    bool marked = false;
    const std::size_t start = at_;
    if (peek() == '*' && peek(1) == '*') {
      at_ += 2;
      marked = true;
    } else if (peek() == '^') {
      ++at_;
      marked = true;
    }
    const bool bracket = (marked || is_digit(peek(1)) || peek(1) == '-' || peek(1) == '+') && peek() == '(';
    if (bracket) ++at_;
    std::size_t end = at_;
    if (peek() == '-' || peek() == '+') ++end;
    while (is_digit(peek(end - at_))) ++end;
    const auto value = parse_integer(text_.substr(at_, end - at_));
    if (!value || std::abs(*value) > 300) {
      if (marked) throw UnitFault{"has a malformed power"};
      at_ = start;
      return 1;
    }
    at_ = end;
    if (bracket) close();
    return static_cast<int>(*value);
  }

  static void join(ParsedUnit& unit, const ParsedUnit& by, int power) {
    multiply(unit.value, raised(by.value, power));
    unit.has_number = unit.has_number || by.has_number;
    for (const Factor& factor : by.factors) unit.factors.push_back({factor.name, factor.power * power});
  }

  std::string_view text_;
  std::size_t at_ = 0;
};

}  // namespace

ParsedUnit parse_unit(const std::string& text) {
  if (trimmed(text).empty() || text == "1") return {};
  return UnitParser(trimmed(text)).parse();
}

}  // namespace thirdrung
