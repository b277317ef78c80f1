// protocol/cli/help.cpp -- the catalogue for people.
#include "protocol/cli/help.hpp"

#include <algorithm>
#include <ostream>

#include "protocol/catalogue.hpp"
#include "protocol/cli/fold.hpp"
#include "protocol/declare/decode.hpp"
#include "protocol/declare/describe.hpp"
#include "protocol/declare/nearest.hpp"

namespace countsel {
namespace {

void entry(std::ostream& out, const std::string& name, const std::string& text) {
  constexpr std::size_t indent = 20;
  out << "  " << name;
  out << (name.size() + 2 < indent ? std::string(indent - name.size() - 2, ' ')
                                   : "\n" + std::string(indent, ' '));
  out << folded(text, indent) << "\n";
}

void explain(std::ostream& out, const Question& question) {
  out << question.name << ": " << question.asks << "\n";
  if (!question.roles.empty()) {
    out << "\nRoles\n";
    for (const auto& role : question.roles) {
      entry(out, role.name + (role.required ? "*" : ""), role.doc + " (" + holds_name(role.holds) + ")");
    }
  }
  if (!question.options.empty()) {
    out << "\nOptions\n";
    const auto defaults = question.make();
    for (const auto& option : question.options) {
      const Json standard = option.get(*defaults);
      std::string text = option.doc + ": " + allowed_text(option);
      if (!standard.is_null()) text += "; default " + standard.dump();
      entry(out, option.name, text);
    }
  }
  if (!question.figures.empty()) {
    out << "\nFigures\n";
    for (const auto& figure : question.figures) entry(out, figure.name, figure.doc);
  }
  for (const auto& table : question.tables) {
    out << "\nTable " << table.name << ": " << table.doc << "\n  ";
    std::string columns;
    for (const auto& column : table.columns) columns += (columns.empty() ? "" : ", ") + column.name;
    out << folded(columns, 2) << "\n";
  }
  if (!question.sources.empty()) {
    out << "\nMethods\n";
    for (const auto& source : question.sources)
      out << "  " << folded(source.name + ": " + source.publication, 4) << "\n";
  }
  if (!question.examples.empty()) {
    out << "\nExample\n  " << question.examples.front() << "\n";
  }
}

void list(std::ostream& out, bool services) {
  for (const auto* question : catalogue()) {
    if (question->service == services) entry(out, question->name, question->asks);
  }
}

}  // namespace

std::string main_footer() {
  return "\nExamples:\n"
         "  countsel quick \"14 in 2300 vs 5 in 2100\"\n"
         "  countsel ask how_often per=100 --roles count=bursts,exposure=km_years,group=material mains.csv\n"
         "  countsel questions how_often\n"
         "\nExit status: 0 answered, 1 refused, 2 misuse.\n"
         "A calculation aid: local codes and licensed practice decide.";
}

std::string ask_footer() {
  std::string text = "\nQuestions:\n";
  for (const auto* question : catalogue()) {
    if (!question->service)
      text += "  " + question->name +
              std::string(18 - std::min<std::size_t>(17, question->name.size()), ' ') + question->asks + "\n";
  }
  return text +
         "\n`countsel questions NAME` explains one: its roles, options and methods.\n"
         "A table may be CSV, or cells pasted from a sheet (tab-separated) on standard input.";
}

bool print_questions(std::ostream& out, std::ostream& errors, const std::string& name) {
  if (!name.empty()) {
    const Question* question = find_question(name);
    if (!question) {
      const std::string near = nearest(name, question_names());
      errors << "countsel: there is no question \"" << name << "\"."
             << (near.empty() ? "" : " Did you mean " + near + "?") << "\n";
      return false;
    }
    explain(out, *question);
    return true;
  }
  out << "Questions about rates\n";
  list(out, false);
  out << "\nAbout the server\n";
  list(out, true);
  out << "\n`countsel questions NAME` explains one.\n";
  return true;
}

}  // namespace countsel
