// protocol/services/quick_line.cpp -- tokens, then the grammar by hand: it is five rules long.
#include "protocol/services/quick_line.hpp"

#include <algorithm>
#include <cctype>
#include <charconv>
#include <vector>

#include "engine/refusal.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

struct Token {
  enum Kind { number, word, slash, percent, question } kind;
  double value = 0;
  std::string text;
};

[[noreturn]] void cannot_read(const std::string& what) {
  throw Refusal(Code::bad_value, what, {}, "Say it like \"14 in 2,300 vs 5 in 2,100 per 1,000 at 95%\".");
}

bool digit(char c) { return c >= '0' && c <= '9'; }

Token read_number_token(std::string_view line, std::size_t& at) {
  const std::size_t from = at;
  std::string plain;
  while (at < line.size()) {
    if (digit(line[at])) {
      plain += line[at++];
    } else if (line[at] == ',' && at + 1 < line.size() && digit(line[at + 1])) {
      std::size_t run = 1;
      while (at + run < line.size() && digit(line[at + run])) ++run;
      const bool first = plain.find('.') == std::string::npos && !plain.empty() && plain.size() <= 3;
      const bool later = from < at && line.substr(from, at - from).find(',') != std::string_view::npos;
      if (run - 1 != 3 || plain.find('.') != std::string::npos || !(first || later)) {
        throw Refusal(
            Code::bad_value,
            "\"" + brief(line.substr(from, at + run - from)) + "\" could be read in two ways.", {},
            "Write decimals with a point, as in 3.5; a comma only before three digits, as in 3,400.");
      }
      ++at;
    } else if (line[at] == '.' && at + 1 < line.size() && digit(line[at + 1]) &&
               plain.find('.') == std::string::npos) {
      plain += line[at++];
    } else {
      break;
    }
  }
  if (at < line.size() && (line[at] == 'e' || line[at] == 'E')) {
    std::size_t run = at + 1;
    if (run < line.size() && (line[run] == '+' || line[run] == '-')) ++run;
    if (run < line.size() && digit(line[run])) {
      while (run < line.size() && digit(line[run])) ++run;
      plain += std::string(line.substr(at, run - at));
      plain.erase(std::remove(plain.begin(), plain.end(), '+'), plain.end());
      at = run;
    }
  }
  Token token{Token::number, 0, std::string(line.substr(from, at - from))};
  const auto [end, error] = std::from_chars(plain.data(), plain.data() + plain.size(), token.value);
  if (error != std::errc() || end != plain.data() + plain.size()) {
    cannot_read("\"" + brief(token.text) + "\" is no number that can be used.");
  }
  return token;
}

std::vector<Token> tokens_of(std::string_view line) {
  std::vector<Token> tokens;
  for (std::size_t at = 0; at < line.size();) {
    const char c = line[at];
    if (c == ' ' || c == '\t' ||
        ((c == ',' || c == ';' || c == '.') && (at + 1 == line.size() || line[at + 1] == ' '))) {
      ++at;
    } else if (digit(c) || (c == '.' && at + 1 < line.size() && digit(line[at + 1]))) {
      tokens.push_back(read_number_token(line, at));
    } else if (c == '/' || c == '%' || c == '?') {
      tokens.push_back({c == '/'   ? Token::slash
                        : c == '%' ? Token::percent
                                   : Token::question,
                        0, std::string(1, c)});
      ++at;
    } else if (std::isalpha(static_cast<unsigned char>(c)) || static_cast<unsigned char>(c) >= 0x80) {
      const std::size_t from = at;
      const auto inside = [](char x) {
        return std::isalnum(static_cast<unsigned char>(x)) || static_cast<unsigned char>(x) >= 0x80 ||
               x == '-' || x == '_' || x == '\'';
      };
      while (at < line.size() && inside(line[at])) ++at;
      tokens.push_back({Token::word, 0, std::string(line.substr(from, at - from))});
    } else if (c == '-' && at + 1 < line.size() && digit(line[at + 1])) {
      cannot_read("A number below 0 stands in the line; counts and exposures are 0 or more.");
    } else {
      cannot_read("The sign \"" + std::string(1, c) + "\" cannot be read here.");
    }
  }
  return tokens;
}

/// Shifted in the text, so that 99.9% is the double nearest to 0.999.
double hundredth(const Token& percent) {
  double value = percent.value / 100;
  const std::string shifted = percent.text + "e-2";
  double exact = 0;
  const auto [end, error] = std::from_chars(shifted.data(), shifted.data() + shifted.size(), exact);
  if (error == std::errc() && end == shifted.data() + shifted.size()) value = exact;
  return value;
}

class Reader {
 public:
  explicit Reader(std::vector<Token> tokens) : tokens_(std::move(tokens)) {}

  SpokenLine read() {
    if (tokens_.empty()) cannot_read("The line is empty.");
    SpokenLine line;
    line.first = pair("the line");
    while (at_ < tokens_.size()) {
      if (take("vs") || take("versus") || take("v")) {
        second(line, pair("what stands after \"vs\""));
      } else if (take("against")) {
        against(line);
      } else if (take("per")) {
        base(line);
      } else if (take("at")) {
        level(line);
      } else if (is("is") || is("are") || is("was") || is("were")) {
        closing();
      } else if (tokens_[at_].kind == Token::question && at_ + 1 == tokens_.size()) {
        ++at_;
      } else {
        cannot_read("The line cannot be read from \"" + brief(tokens_[at_].text) + "\" on.");
      }
    }
    return line;
  }

 private:
  bool is(const char* word) const {
    if (at_ >= tokens_.size() || tokens_[at_].kind != Token::word) return false;
    std::string lower = tokens_[at_].text;
    std::transform(lower.begin(), lower.end(), lower.begin(),
                   [](unsigned char c) { return static_cast<char>(std::tolower(c)); });
    return lower == word;
  }
  bool take(const char* word) {
    if (!is(word)) return false;
    ++at_;
    return true;
  }
  bool keyword() const {
    for (const auto* word :
         {"in", "over", "out", "vs", "versus", "v", "against", "per", "at", "is", "are", "was", "were"}) {
      if (is(word)) return true;
    }
    return false;
  }
  double number(const std::string& what) {
    if (at_ >= tokens_.size() || tokens_[at_].kind != Token::number) {
      cannot_read("A number is missing: " + what + ".");
    }
    return tokens_[at_++].value;
  }
  std::string words() {
    std::string text;
    while (at_ < tokens_.size() && tokens_[at_].kind == Token::word && !keyword()) {
      text += (text.empty() ? "" : " ") + tokens_[at_++].text;
    }
    return text;
  }
  bool connector() {
    if (at_ < tokens_.size() && tokens_[at_].kind == Token::slash) {
      ++at_;
      return true;
    }
    if (is("out")) {
      ++at_;
      if (!take("of")) cannot_read("After \"out\", \"of\" is expected.");
      return true;
    }
    return take("in") || take("over");
  }
  SpokenPair pair(const std::string& where) {
    SpokenPair pair;
    pair.count = number(where + " begins with a count");
    pair.events = words();
    if (connector()) {
      pair.exposure = number("after the count comes how much was observed");
      pair.unit = words();
    }
    return pair;
  }
  void second(SpokenLine& line, SpokenPair pair) {
    if (line.second || line.target_rate) cannot_read("The line compares more than two.");
    if (line.first.exposure.has_value() != pair.exposure.has_value()) {
      cannot_read("One side has an exposure and the other has none.");
    }
    line.second = std::move(pair);
  }
  void against(SpokenLine& line) {
    // "against 5 in 2100" is a second pair, "against 2.5 per 1000" a target rate.
    std::size_t ahead = at_ + 1;
    while (ahead < tokens_.size() && tokens_[ahead].kind == Token::word && tokens_[ahead].text != "per" &&
           tokens_[ahead].text != "in" && tokens_[ahead].text != "over" && tokens_[ahead].text != "out") {
      ++ahead;
    }
    if (ahead >= tokens_.size() || tokens_[ahead].text != "per")
      return second(line, pair("what stands after \"against\""));
    if (line.second || line.target_rate) cannot_read("The line compares more than two.");
    line.target_rate = number("after \"against\" comes a rate");
    words();
    ++at_;
    base(line);
  }
  void base(SpokenLine& line) {
    double per = 1;
    if (at_ < tokens_.size() && tokens_[at_].kind == Token::number) per = tokens_[at_++].value;
    const std::string unit = words();
    if (line.per && *line.per != per) cannot_read("The line gives two different bases.");
    if (!(per > 0)) cannot_read("Rates cannot be stated per 0.");
    line.per = per;
    if (!unit.empty()) line.per_unit = unit;
  }
  void level(SpokenLine& line) {
    const std::size_t from = at_;
    const double percent = number("after \"at\" comes a level such as 95%");
    if (at_ < tokens_.size() && tokens_[at_].kind == Token::percent) {
      ++at_;
    } else {
      cannot_read("After \"at\" comes a level with its sign, such as 95%.");
    }
    if (!(percent > 0 && percent < 100)) cannot_read("The level lies between 0% and 100%.");
    line.confidence = hundredth(tokens_[from]);
  }
  void closing() {
    while (at_ < tokens_.size() && (tokens_[at_].kind == Token::word || tokens_[at_].kind == Token::question))
      ++at_;
    if (at_ < tokens_.size())
      cannot_read("The line cannot be read from \"" + brief(tokens_[at_].text) + "\" on.");
  }

  std::vector<Token> tokens_;
  std::size_t at_ = 0;
};

}  // namespace

SpokenLine read_spoken(std::string_view line) { return Reader(tokens_of(line)).read(); }

}  // namespace countsel
