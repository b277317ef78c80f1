// protocol/wire/tree_builder.hpp -- builds the small document tree of options and words from SAX events.
#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <utility>
#include <vector>

#include "protocol/wire/json_fwd.hpp"
#include "protocol/wire/limits.hpp"

namespace countsel {

class TreeBuilder {
 public:
  void begin(Json& root) {
    root_ = &root;
    open_.clear();
  }
  void open(Json container) { open_.push_back(&put(std::move(container))); }
  void close() { open_.pop_back(); }
  void key(std::string name) { key_ = std::move(name); }
  void value(Json value) { put(std::move(value)); }
  bool too_many() const { return values_ > limits::most_values; }

 private:
  Json& put(Json value) {
    ++values_;
    if (open_.empty()) return *root_ = std::move(value);
    Json& into = *open_.back();
    if (into.is_array()) {
      into.push_back(std::move(value));
      return into.back();
    }
    // Straight to the end: a key given twice has been refused before, and looking for it would take long.
    return into.get_ref<Json::object_t&>().emplace_back(std::move(key_), std::move(value)).second;
  }

  Json* root_ = nullptr;
  std::vector<Json*> open_;
  std::string key_;
  std::size_t values_ = 0;
};

}  // namespace countsel
