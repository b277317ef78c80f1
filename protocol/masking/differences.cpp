// protocol/masking/differences.cpp -- comparing part by part, to the last bit.
#include "protocol/masking/differences.hpp"

#include <algorithm>
#include <cctype>
#include <cmath>
#include <limits>

#include "protocol/masking/counts_shown.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

bool same(double a, double b) { return a == b || (std::isnan(a) && std::isnan(b)); }
bool same(const std::string& a, const std::string& b) { return a == b; }
bool same(const OptionalText& a, const OptionalText& b) { return a == b; }
bool same(const Figure& a, const Figure& b) {
  const auto *x = std::get_if<double>(&a), *y = std::get_if<double>(&b);
  return x && y ? same(*x, *y) : a == b;
}

template <class T>
void compare(const std::vector<T>& a, const std::vector<T>& b, std::vector<char>& withheld) {
  for (std::size_t i = 0; i < a.size(); ++i)
    if (i >= b.size() || a.size() != b.size() || !same(a[i], b[i])) withheld[i] = 1;
}

std::size_t length(const Cells& cells) {
  return std::visit([](const auto& list) { return list.size(); }, cells);
}

bool same_place(const std::vector<Place>& a, const std::vector<Place>& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(),
                    [](const Place& x, const Place& y) { return x.column == y.column && x.row == y.row; });
}

/// Whether two pictures are drawn in the same frame, so that their points can be compared.
bool same_frame(const Picture& a, const Picture& b) {
  if (a.title != b.title || a.x_name != b.x_name || a.y_name != b.y_name || a.x != b.x ||
      a.series.size() != b.series.size() || a.lines.size() != b.lines.size())
    return false;
  for (std::size_t s = 0; s < a.series.size(); ++s) {
    const auto &one = a.series[s], &two = b.series[s];
    if (one.name != two.name || one.y.size() != two.y.size() || one.low.size() != two.low.size() ||
        one.high.size() != two.high.size())
      return false;
  }
  return true;
}

std::size_t count(const std::vector<char>& flags) {
  return static_cast<std::size_t>(std::count(flags.begin(), flags.end(), 1));
}

void blank(std::vector<double>& values, const std::vector<char>& withheld) {
  for (std::size_t i = 0; i < values.size(); ++i)
    if (withheld[i]) values[i] = nan;
}

/// The cells with a mark or nothing in place of those withheld.
Cells taken_out(const Cells& cells, const std::vector<char>& withheld, bool counts, const std::string& mark) {
  if (const auto* numbers = std::get_if<std::vector<double>>(&cells)) {
    if (!counts) {
      std::vector<double> left = *numbers;
      blank(left, withheld);
      return left;
    }
    std::vector<Figure> left;
    for (std::size_t i = 0; i < numbers->size(); ++i)
      left.push_back(withheld[i] ? Figure(mark) : Figure((*numbers)[i]));
    return left;
  }
  if (const auto* marked = std::get_if<std::vector<Figure>>(&cells)) return *marked;
  std::vector<OptionalText> left;
  for (std::size_t i = 0; i < withheld.size(); ++i) {
    const auto* texts = std::get_if<std::vector<std::string>>(&cells);
    const OptionalText text =
        texts ? OptionalText((*texts)[i]) : std::get<std::vector<OptionalText>>(cells)[i];
    left.push_back(withheld[i] ? OptionalText() : text);
  }
  return left;
}

/// The declared style of a figure; `number` where it is not declared.
Style figure_style(const Question& question, const std::string& name) {
  for (const auto& spec : question.figures)
    if (spec.name == name) return spec.style;
  return Style::number;
}

template <class T>
void keep(std::vector<T>& items, const std::vector<char>& withheld) {
  std::vector<T> left;
  for (std::size_t i = 0; i < items.size(); ++i)
    if (!withheld[i]) left.push_back(std::move(items[i]));
  items = std::move(left);
}

}  // namespace

Withheld::Withheld(const Answer& answer)
    : figures(answer.figures.size(), 0),
      notes(answer.notes.size(), 0),
      methods(answer.method.size(), 0),
      sentences(sentences_of(answer.say).size(), 0) {
  for (const auto& table : answer.tables) {
    tables.emplace_back();
    for (const auto& column : table.columns) tables.back().emplace_back(length(column.second), 0);
  }
  if (!answer.picture) return;
  lines.assign(answer.picture->lines.size(), 0);
  for (const auto& series : answer.picture->series) {
    y.emplace_back(series.y.size(), 0);
    low.emplace_back(series.low.size(), 0);
    high.emplace_back(series.high.size(), 0);
  }
}

std::size_t Withheld::size() const {
  // A sentence is worth some cells: it is what most people read.
  std::size_t all = count(figures) + 5 * count(sentences);
  for (const auto& table : tables)
    for (const auto& column : table) all += count(column);
  return all;
}

std::vector<std::string> sentences_of(const std::string& text) {
  std::vector<std::string> sentences;
  std::size_t begin = 0;
  for (std::size_t at = text.find(". "); at != std::string::npos; at = text.find(". ", at + 1)) {
    // "St. Mary" is no end of a sentence.
    const auto word = text.find_last_of(" (", at);
    const std::size_t letters = at - (word == std::string::npos ? 0 : word + 1);
    const bool ends = at + 2 < text.size() && std::isupper(static_cast<unsigned char>(text[at + 2])) &&
                      (letters > 3 || !std::isalpha(static_cast<unsigned char>(text[at - 1])));
    if (at == 0 || !ends) continue;
    sentences.push_back(text.substr(begin, at + 2 - begin));
    begin = at + 2;
  }
  sentences.push_back(text.substr(begin));
  return sentences;
}

void add_differences(const Answer& answer, const Answer& other, Withheld& withheld) {
  for (std::size_t i = 0; i < answer.figures.size(); ++i) {
    if (i >= other.figures.size() || answer.figures[i].first != other.figures[i].first ||
        !same(answer.figures[i].second, other.figures[i].second))
      withheld.figures[i] = 1;
  }
  for (std::size_t t = 0; t < answer.tables.size(); ++t) {
    const auto& columns = answer.tables[t].columns;
    for (std::size_t c = 0; c < columns.size(); ++c) {
      auto& flags = withheld.tables[t][c];
      const bool there = t < other.tables.size() && c < other.tables[t].columns.size() &&
                         other.tables[t].columns[c].first == columns[c].first &&
                         other.tables[t].columns[c].second.index() == columns[c].second.index();
      if (!there) {
        std::fill(flags.begin(), flags.end(), 1);
        continue;
      }
      std::visit(
          [&](const auto& cells) {
            using List = std::decay_t<decltype(cells)>;
            compare(cells, std::get<List>(other.tables[t].columns[c].second), flags);
          },
          columns[c].second);
    }
  }
  const auto sentences = sentences_of(answer.say), others = sentences_of(other.say);
  for (std::size_t i = 0; i < sentences.size(); ++i)
    if (std::find(others.begin(), others.end(), sentences[i]) == others.end()) withheld.sentences[i] = 1;
  for (std::size_t i = 0; i < answer.notes.size(); ++i) {
    const auto& note = answer.notes[i];
    if (std::none_of(other.notes.begin(), other.notes.end(), [&](const Note& one) {
          return one.code == note.code && one.text == note.text && same_place(one.where, note.where);
        }))
      withheld.notes[i] = 1;
  }
  for (std::size_t i = 0; i < answer.method.size(); ++i) {
    const auto& method = answer.method[i];
    if (std::none_of(other.method.begin(), other.method.end(),
                     [&](const Source& one) { return one.name == method.name; }))
      withheld.methods[i] = 1;
  }
  if (!answer.picture) return;
  if (!other.picture || !same_frame(*answer.picture, *other.picture)) {
    withheld.picture = true;
    return;
  }
  for (std::size_t s = 0; s < answer.picture->series.size(); ++s) {
    const auto &one = answer.picture->series[s], &two = other.picture->series[s];
    compare(one.y, two.y, withheld.y[s]);
    compare(one.low, two.low, withheld.low[s]);
    compare(one.high, two.high, withheld.high[s]);
  }
  for (std::size_t i = 0; i < answer.picture->lines.size(); ++i)
    if (!same(answer.picture->lines[i].second, other.picture->lines[i].second)) withheld.lines[i] = 1;
}

bool derived(Style style) {
  return style == Style::rate || style == Style::every || style == Style::ratio || style == Style::log ||
         style == Style::p_value || style == Style::statistic || style == Style::share;
}

void withhold_derived_figures(const Question& question, const Answer& answer, Withheld& withheld) {
  bool any = false;
  for (std::size_t i = 0; i < answer.figures.size(); ++i)
    any |= withheld.figures[i] && derived(figure_style(question, answer.figures[i].first));
  for (std::size_t i = 0; any && i < answer.figures.size(); ++i)
    if (derived(figure_style(question, answer.figures[i].first))) withheld.figures[i] = 1;
}

void withhold_all(const Question& question, const Answer& answer, Withheld& withheld) {
  for (std::size_t i = 0; i < answer.figures.size(); ++i) {
    withheld.figures[i] = figure_style(question, answer.figures[i].first) != Style::exposure;
  }
  for (std::size_t t = 0; t < answer.tables.size(); ++t) {
    bool counted = false;  // what stands before the first count says which row it is
    for (std::size_t c = 0; c < answer.tables[t].columns.size(); ++c) {
      const auto& [name, cells] = answer.tables[t].columns[c];
      const Style style = style_of(question, answer.tables[t].name, name);
      const bool identity =
          !counted && (style == Style::text || style == Style::level || style == Style::whole);
      counted |= style == Style::count;
      if (style == Style::exposure || style == Style::count || identity) continue;
      std::fill(withheld.tables[t][c].begin(), withheld.tables[t][c].end(), 1);
    }
  }
  std::fill(withheld.sentences.begin(), withheld.sentences.end(), 1);
  // Notes may tell of the counts; what the intake said of rows left out comes back with the caller.
  std::fill(withheld.notes.begin(), withheld.notes.end(), 1);
  withheld.picture = true;
}

void take_out(const Question& question, const Withheld& withheld, const std::string& mark, Answer& answer) {
  for (std::size_t i = 0; i < answer.figures.size(); ++i) {
    if (!withheld.figures[i]) continue;
    auto& [name, figure] = answer.figures[i];
    const bool counts = figure_style(question, name) == Style::count;
    figure = counts ? Figure(mark) : Figure(nan);
  }
  for (std::size_t t = 0; t < answer.tables.size(); ++t) {
    for (std::size_t c = 0; c < answer.tables[t].columns.size(); ++c) {
      const auto& flags = withheld.tables[t][c];
      if (count(flags) == 0) continue;
      auto& [name, cells] = answer.tables[t].columns[c];
      const bool counts = style_of(question, answer.tables[t].name, name) == Style::count;
      cells = taken_out(cells, flags, counts, mark);
    }
  }
  std::string said;
  const auto sentences = sentences_of(answer.say);
  for (std::size_t i = 0; i < sentences.size(); ++i)
    if (!withheld.sentences[i]) said += sentences[i];
  while (!said.empty() && said.back() == ' ') said.pop_back();
  answer.say = std::move(said);
  keep(answer.notes, withheld.notes);
  keep(answer.method, withheld.methods);
  answer.more = nullptr;
  if (!answer.picture) return;
  if (withheld.picture) {
    answer.picture.reset();
    return;
  }
  for (std::size_t s = 0; s < answer.picture->series.size(); ++s) {
    auto& series = answer.picture->series[s];
    blank(series.y, withheld.y[s]);
    blank(series.low, withheld.low[s]);
    blank(series.high, withheld.high[s]);
  }
  keep(answer.picture->lines, withheld.lines);
}

}  // namespace countsel
