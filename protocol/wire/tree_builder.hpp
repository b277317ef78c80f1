// protocol/wire/tree_builder.hpp -- builds the small document tree of options and words from SAX events.
#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <utility>
#include <vector>

#include "protocol/wire/json_fwd.hpp"

namespace countsel {

class TreeBuilder {
 public:
  void begin(Json& root) {
    root_ = &root;
    open_.clear();
  }
  bool open(Json container) {
    open_.push_back(&put(std::move(container)));
    return true;
  }
  bool close() {
    open_.pop_back();
    return true;
  }
  /// False if the key stands there already.
  bool key(const std::string& name) {
    if (open_.back()->contains(name)) return false;
    key_ = name;
    (*open_.back())[name] = nullptr;
    return true;
  }
  bool value(Json value) {
    put(std::move(value));
    return true;
  }

 private:
  Json& put(Json value) {
    if (open_.empty()) return *root_ = std::move(value);
    Json& into = *open_.back();
    if (into.is_array()) {
      into.push_back(std::move(value));
      return into.back();
    }
    return into[key_] = std::move(value);
  }

  Json* root_ = nullptr;
  std::vector<Json*> open_;
  std::string key_;
};

}  // namespace countsel
