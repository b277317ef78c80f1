// protocol/data/only.cpp -- each distinct text is compared once, each number as a number.
#include "protocol/data/only.hpp"

#include <charconv>
#include <unordered_map>

#include "protocol/data/columns.hpp"
#include "protocol/declare/spec.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

/// Which value of the list a cell is: its index, or -1.
class Matcher {
 public:
  explicit Matcher(const Only& only) : column_(*only.column) {
    for (std::size_t i = 0; i < only.values.size(); ++i) {
      const auto index = static_cast<std::int32_t>(i);
      const std::string& value = only.values[i];
      by_text_.try_emplace(value, index);
      double number = 0;
      const auto [end, error] = std::from_chars(value.data(), value.data() + value.size(), number);
      // Only the text that a number has as a level stands for it: "95", not "95.0".
      if (error == std::errc() && end == value.data() + value.size() && number_text(number) == value)
        by_number_.try_emplace(number, index);
    }
    for (const auto& text : column_.texts) of_text_.push_back(index_of(text));
  }
  std::int32_t match(std::size_t row) const {
    switch (const auto tag = column_.tag_at(row); tag) {
      case tag::number: {
        const auto at = by_number_.find(column_.numbers[row]);
        return at == by_number_.end() ? -1 : at->second;
      }
      case tag::blank:
        return index_of("");
      case tag::yes:
        return index_of("true");
      case tag::no:
        return index_of("false");
      case tag::nested:
        return -1;
      default:
        return of_text_[static_cast<std::size_t>(tag)];
    }
  }

 private:
  std::int32_t index_of(const std::string& text) const {
    const auto at = by_text_.find(text);
    return at == by_text_.end() ? -1 : at->second;
  }

  const Column& column_;
  std::unordered_map<std::string, std::int32_t> by_text_;
  std::unordered_map<double, std::int32_t> by_number_;
  std::vector<std::int32_t> of_text_;
};

void note_unmatched(const Only& only, const std::vector<char>& met, std::vector<Note>& notes) {
  std::string some;
  std::size_t unmatched = 0;
  for (std::size_t i = 0; i < met.size(); ++i) {
    if (met[i] || ++unmatched > 5) continue;
    some +=
        (some.empty() ? "" : ", ") + (only.values[i].empty() ? "blank" : "\"" + brief(only.values[i]) + "\"");
  }
  if (unmatched == 0) return;
  std::string text = "No row of " + only.column->name + " is " + some;
  if (unmatched > 5) text += " and " + std::to_string(unmatched - 5) + " more";
  notes.push_back({"only_unmatched", text + ".", {{only.column->name, 0}}});
}

}  // namespace

std::vector<Only> read_only(const Table& table, const Json& rest) {
  std::vector<Only> all;
  const auto given = rest.find("only");
  if (given == rest.end() || given->is_null()) return all;
  if (!given->is_object()) {
    throw Refusal(Code::bad_type, "of.only is " + brief_json(*given) + "; it should be an object.", {},
                  R"(Give columns and the values to keep: {"quarter":["Q1","Q2"]}.)");
  }
  for (const auto& [name, wanted] : given->items()) {
    Only only{&find_column(table, name, " for of.only"), {}};
    std::unordered_map<std::string, bool> seen;
    // clang 14 captures no structured binding.
    const auto add = [&, option = "of.only." + name](const Json& value) {
      std::string text = value.is_null() ? "" : bind::level_of(option, value);
      if (seen.try_emplace(text, true).second) only.values.push_back(std::move(text));
    };
    if (wanted.is_array()) {
      for (const auto& value : wanted) add(value);
    } else {
      add(wanted);
    }
    all.push_back(std::move(only));
  }
  return all;
}

std::vector<char> rows_to_keep(const std::vector<Only>& only, std::size_t rows, std::vector<Note>& notes) {
  std::vector<char> keep;
  if (!only.empty()) keep.assign(rows, 1);
  for (const auto& one : only) {
    const Matcher matcher(one);
    std::vector<char> met(one.values.size(), 0);
    for (std::size_t row = 0; row < rows; ++row) {
      const auto index = matcher.match(row);
      if (index < 0) {
        keep[row] = 0;
      } else {
        met[static_cast<std::size_t>(index)] = 1;
      }
    }
    note_unmatched(one, met, notes);
  }
  return keep;
}

}  // namespace countsel
