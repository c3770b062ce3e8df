// The sheet as a JSON document, both ways.
#pragma once

#include <nlohmann/json.hpp>

#include "tauwright/tune/tuning_sheet.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

using Json = nlohmann::ordered_json;

constexpr const char* sheet_schema = "tauwright-tuning-sheet";
constexpr int sheet_schema_version = 2;  // 1 is still read

Json json_of(const TuningSheet& sheet);
TuningSheet sheet_of(const Json& document);
std::string text_of_json(const Json& json, int indent);

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
