// protocol/cli/print.cpp -- columns aligned by what is seen, not by bytes.
#include "protocol/cli/print.hpp"

#include <algorithm>
#include <nlohmann/json.hpp>
#include <ostream>
#include <string>
#include <vector>

#include "protocol/cli/fold.hpp"

namespace countsel {
namespace {

constexpr std::size_t most_rows = 60;

void print_table(std::ostream& out, const Json& shown, const Json& heads, const Json& cells) {
  struct Column {
    std::string head;
    std::vector<std::string> texts;
    bool numbers;
    std::size_t width;
  };
  std::vector<Column> columns;
  for (const auto& [name, texts] : shown.items()) {
    // The limits stand in the estimate's own text; columns of their own would say it twice.
    if (heads.contains(name)) {
      const auto& head = heads[name].get_ref<const std::string&>();
      if (head.rfind("lower ", 0) == 0 || head.rfind("upper ", 0) == 0) continue;
    }
    Column column{heads.value(name, name), texts.get<std::vector<std::string>>(), true, 0};
    for (const auto& cell : cells[name]) column.numbers &= cell.is_number() || cell.is_null();
    if (column.texts.size() > most_rows) column.texts.resize(most_rows);
    column.width = seen_width(column.head);
    for (const auto& text : column.texts) column.width = std::max(column.width, seen_width(text));
    columns.push_back(std::move(column));
  }
  if (columns.empty()) return;
  const auto put = [&](const Column& column, const std::string& text, bool last) {
    const std::string space(column.width - std::min(column.width, seen_width(text)), ' ');
    out << (column.numbers ? space + text : last ? text : text + space) << (last ? "\n" : "  ");
  };
  for (std::size_t j = 0; j < columns.size(); ++j) put(columns[j], columns[j].head, j + 1 == columns.size());
  for (std::size_t i = 0; i < columns[0].texts.size(); ++i) {
    for (std::size_t j = 0; j < columns.size(); ++j)
      put(columns[j], columns[j].texts[i], j + 1 == columns.size());
  }
  const std::size_t rows = shown.begin()->size();
  if (rows > most_rows) out << "… and " << rows - most_rows << " more rows\n";
}

}  // namespace

void print_answer(std::ostream& out, const Json& answer) {
  if (answer.contains("say")) out << folded(answer["say"].get<std::string>(), 0) << "\n";
  if (answer.contains("sentence")) out << "Read as: " << answer["sentence"].get<std::string>() << "\n";
  if (answer.contains("shown")) {
    for (const auto& [name, table] : answer["shown"].items()) {
      out << "\n";
      print_table(out, table, answer["heads"][name], answer["tables"][name]);
    }
  } else if (answer.contains("figures")) {
    for (const auto& [name, value] : answer["figures"].items())
      out << "  " << name << ": " << value.dump() << "\n";
  }
  if (answer.contains("notes") && !answer["notes"].empty()) {
    out << "\n";
    for (const auto& note : answer["notes"])
      out << "- " << folded(note["text"].get<std::string>(), 2) << "\n";
  }
}

void print_refusal(std::ostream& out, const Json& refused) {
  out << "Refused: " << refused["text"].get<std::string>() << "\n";
  if (refused.contains("hint") && !refused["hint"].get_ref<const std::string&>().empty()) {
    out << refused["hint"].get<std::string>() << "\n";
  }
}

}  // namespace countsel
