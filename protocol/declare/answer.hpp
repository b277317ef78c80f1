// protocol/declare/answer.hpp -- what a question answers with, before it becomes a line.
#pragma once

#include <nlohmann/json.hpp>
#include <optional>
#include <string>
#include <utility>
#include <variant>
#include <vector>

#include "engine/refusal.hpp"
#include "protocol/wire/json_fwd.hpp"

namespace countsel {

/// NaN is written as null, an infinity as "inf" or "-inf".
using Figure = std::variant<double, std::string, bool>;

struct Note {
  std::string code, text;
  std::vector<Place> where = {};
};

/// A published method: its usual name and where it comes from.
struct Source {
  std::string name, publication;
};

using OptionalText = std::optional<std::string>;
/// Figures only where a column mixes numbers and marks, such as "<5".
using Cells = std::variant<std::vector<double>, std::vector<std::string>, std::vector<OptionalText>,
                           std::vector<Figure>>;

struct OutTable {
  std::string name;
  std::vector<std::pair<std::string, Cells>> columns;
};

struct Series {
  std::string name, role;  ///< role: points, line, steps, band, bars
  std::vector<double> y, low = {}, high = {};
};

struct Picture {
  std::string kind;  ///< limits, funnel, watch, bars, curve, fit
  std::string title;
  std::string x_name;
  std::variant<std::vector<std::string>, std::vector<double>> x;
  std::string y_name;
  std::vector<Series> series;
  std::vector<std::pair<std::string, double>> lines = {};
};

struct Answer {
  std::string say;
  std::vector<std::pair<std::string, Figure>> figures = {};
  std::vector<OutTable> tables = {};
  std::optional<Picture> picture = {};
  std::vector<Source> method = {};
  std::vector<Note> notes = {};
  std::string headline = {};
  Json more = nullptr;  ///< what service questions add: an object, or null
};

}  // namespace countsel
