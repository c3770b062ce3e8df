#include "tune/sheet_json.hpp"

#include <type_traits>

#include "tune/json_fields.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

template <class T> struct is_optional : std::false_type {};
template <class T> struct is_optional<std::optional<T>> : std::true_type {};
template <class T> struct is_list : std::false_type {};
template <class T> struct is_list<std::vector<T>> : std::true_type {};
template <class T> constexpr bool is_word = std::is_enum_v<T>;

// The values an enumeration may have, by trying: all of this library's lie between 0 and 31.
template <class Enumeration> std::optional<Enumeration> value_of_word(const std::string& word) {
    for (int i = 0; i < 32; ++i) {
        const auto value = static_cast<Enumeration>(i);
        if (word != "unknown" && word == name_of(value)) return value;
    }
    return std::nullopt;
}

template <class T> Json written(const T& x);

struct Writer {
    Json object = Json::object();
    template <class T> void operator()(const char* key, const T& x) { object[key] = written(x); }
    template <class T> void since_2(const char* key, const T& x) { object[key] = written(x); }
};

template <class T> Json written(const T& x) {
    if constexpr (is_optional<T>::value) {
        return x ? written(*x) : Json(nullptr);
    } else if constexpr (is_list<T>::value) {
        Json list = Json::array();
        for (const auto& item : x) list.push_back(written(item));
        return list;
    } else if constexpr (std::is_same_v<T, double>) {
        return is_finite(x) ? Json(x) : Json("infinite");
    } else if constexpr (is_word<T>) {
        return name_of(x);
    } else if constexpr (std::is_same_v<T, TransferFunction>) {
        return written(x.factors());
    } else if constexpr (std::is_arithmetic_v<T> || std::is_same_v<T, std::string>) {
        return x;
    } else {
        Writer writer;
        describe(writer, x);
        return std::move(writer.object);
    }
}

[[noreturn]] void malformed(const std::string& path, const std::string& what) {
    throw Error(error_code::file_malformed, "the sheet's " + (path.empty() ? std::string("document") : path) + " " + what +
                                                "; give a document that tauwright wrote");
}

template <class T> void read(const Json& json, const std::string& path, int version, T& x);

struct Reader {
    const Json& object;
    const std::string& path;
    int version;
    template <class T> void since_2(const char* key, T& x) {
        if (version >= 2) (*this)(key, x);
    }
    template <class T> void operator()(const char* key, T& x) {
        const auto it = object.find(key);
        if (it == object.end()) malformed(path + "/" + key, "is missing");
        read(*it, path + "/" + key, version, x);
    }
};

template <class T> void read(const Json& json, const std::string& path, int version, T& x) {
    if constexpr (std::is_same_v<T, TransferFunction>) {
        Factors factors;
        read(json, path, version, factors);
        x = TransferFunction::from_factors(std::move(factors));
    } else if constexpr (is_optional<T>::value) {
        using Value = typename T::value_type;
        if (json.is_null()) {
            x.reset();
        } else if constexpr (std::is_same_v<Value, TransferFunction>) {
            Value value = TransferFunction::from_factors({});
            read(json, path, version, value);
            x = std::move(value);
        } else {
            Value value{};
            read(json, path, version, value);
            x = std::move(value);
        }
    } else if constexpr (is_list<T>::value) {
        if (!json.is_array()) malformed(path, "is not a list");
        x.clear();
        for (std::size_t i = 0; i < json.size(); ++i) {
            typename T::value_type item{};
            read(json[i], path + "/" + std::to_string(i), version, item);
            x.push_back(std::move(item));
        }
    } else if constexpr (std::is_same_v<T, double>) {
        if (json.is_number()) x = json.get<double>();
        else if (json == "infinite") x = std::numeric_limits<double>::infinity();
        else malformed(path, "is not a number");
    } else if constexpr (std::is_same_v<T, bool>) {
        if (!json.is_boolean()) malformed(path, "is neither true nor false");
        x = json.get<bool>();
    } else if constexpr (std::is_integral_v<T>) {
        const bool fits = json.is_number_unsigned()
                              ? json.get<std::uint64_t>() <= static_cast<std::uint64_t>(std::numeric_limits<T>::max())
                              : std::is_signed_v<T> && json.is_number_integer() &&
                                    json.get<std::int64_t>() >= static_cast<std::int64_t>(std::numeric_limits<T>::min());
        if (!fits) malformed(path, "is not a whole number in range");
        x = json.get<T>();
    } else if constexpr (is_word<T>) {
        const auto value = json.is_string() ? value_of_word<T>(json.get<std::string>()) : std::nullopt;
        if (!value) malformed(path, "is not one of the words known here");
        x = *value;
    } else if constexpr (std::is_same_v<T, std::string>) {
        if (!json.is_string()) malformed(path, "is not text");
        x = json.get<std::string>();
    } else {
        if (!json.is_object()) malformed(path, "is not an object");
        Reader reader{json, path, version};
        describe(reader, x);
    }
}

}  // namespace

Json json_of(const TuningSheet& sheet) {
    Json document = Json::object();
    document["schema"] = sheet_schema;
    document["schema_version"] = sheet_schema_version;
    const Json body = written(sheet);
    for (const auto& [key, value] : body.items()) document[key] = value;
    return document;
}

// What other members rely on without looking again.
void require_consistent(const TuningSheet& sheet) {
    const FittedModel& fit = sheet.fit;
    const std::size_t lags = fit.form == Form::first_order_plus_dead_time ? 1 : 0;
    if (fit.lags.size() != lags) malformed("/fit/lags_s", "does not belong to the form");
    if (fit.model.has_value() && fit.form == Form::automatic) malformed("/fit/model", "is given without a form");
    if (fit.covariance.size() != fit.parameter_names.size() * fit.parameter_names.size())
        malformed("/fit/covariance", "is not square in the parameters");
    if (sheet.model.has_value() != fit.model.has_value()) malformed("/model", "and /fit/model are not both given");
    if ((sheet.proposed || sheet.as_found) && !sheet.model) malformed("/proposed", "or /as_found stands without a model");
    for (const auto* controller : {&sheet.as_found, &sheet.proposed})
        if (*controller) require((*controller)->settings, "the sheet's settings");
}

// Names and units given by the caller may be any bytes; what is not UTF-8 is replaced, not refused.
std::string text_of_json(const Json& json, int indent) {
    return json.dump(indent, ' ', false, Json::error_handler_t::replace);
}

TuningSheet sheet_of(const Json& document) {
    if (!document.is_object()) malformed("", "is not an object");
    const auto schema = document.find("schema"), number = document.find("schema_version");
    const bool known = schema != document.end() && *schema == sheet_schema && number != document.end() &&
                       (*number == 1 || *number == sheet_schema_version);
    if (!known)
        throw Error(error_code::schema_unsupported,
                    "the document's schema is not " + std::string(sheet_schema) + " version 1 or " +
                        std::to_string(sheet_schema_version) + "; give a sheet, or read it with the library version that wrote it");
    TuningSheet sheet;
    try {
        read(document, "", number->get<int>(), sheet);
    } catch (const Error& e) {
        if (e.code() == error_code::file_malformed) throw;
        malformed("", std::string("holds an impossible value (") + e.what() + ")");
    }
    require_consistent(sheet);
    return sheet;
}

}  // namespace detail

std::string TuningSheet::json() const {
    return detail::text_of_json(detail::json_of(*this), 2) + "\n";
}

TuningSheet TuningSheet::from_json(std::string_view json) {
    detail::Json document;
    try {
        document = detail::Json::parse(json);
    } catch (const detail::Json::exception& e) {
        throw Error(error_code::file_malformed, std::string("json is not a JSON document (") + e.what() + "); give what json() wrote");
    }
    return detail::sheet_of(document);
}

std::vector<SheetDifference> differences(const TuningSheet& earlier, const TuningSheet& later) {
    const auto a = detail::json_of(earlier).flatten(), b = detail::json_of(later).flatten();
    std::vector<SheetDifference> list;
    for (const auto& [path, value] : a.items()) {
        const auto other = b.find(path);
        if (other == b.end()) list.push_back({path, detail::text_of_json(value, -1), ""});
        else if (*other != value) list.push_back({path, detail::text_of_json(value, -1), detail::text_of_json(*other, -1)});
    }
    for (const auto& [path, value] : b.items())
        if (!a.contains(path)) list.push_back({path, "", detail::text_of_json(value, -1)});
    return list;
}

}  // namespace v0
}  // namespace tauwright
