// The sheet: how it is made, compared and released. What stands on it is in sheet.cpp.
#include "tauwright/tune/tune.hpp"

#include <string_view>

#include "convert.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/tune.h"

namespace shell = tauwright::shell;
using tauwright::SheetDifference;

namespace {

tauwright::TuningRequest tuning_request(const tauw_tuning_request* source) {
    const tauw_tuning_request c = shell::read(source, "request");
    tauwright::TuningRequest request;
    request.time_constant = shell::optional(c.has_time_constant, c.time_constant, "request.time_constant");
    if (c.form != nullptr) request.form = shell::controller_form(c.form, "request.form");
    if (c.duty != nullptr) request.duty = shell::duty(c.duty, "request.duty");
    if (c.as_found != nullptr) request.as_found = shell::entered(c.as_found, "request.as_found");
    if (c.identify != nullptr) request.identify = shell::identify_options(c.identify, "request.identify");
    request.safety_function = shell::flag(c.safety_function, "request.safety_function");
    request.accept_weak_margins_by = shell::text_or_empty(c.accept_weak_margins_by);
    request.loop_name = shell::text_or_empty(c.loop_name);
    return request;
}

int32_t text_of_difference(const tauw_differences* differences, size_t index, std::string SheetDifference::*member,
                           char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const SheetDifference& d = shell::element(shell::live(differences, "differences").value, index);
        shell::give_text(d.*member, text, capacity, needed);
    });
}

}  // namespace

int32_t tauw_tuning_request_defaults(tauw_tuning_request* request, uint32_t size) {
    return shell::fill_defaults(request, size);
}

int32_t tauw_tune(const tauw_record* record, const tauw_tuning_request* request, tauw_sheet** sheet,
                  tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_sheet> made(sheet, "sheet");
        const tauwright::Record& r = shell::live(record, "record").value;
        made.give(tauwright::tune(r, request == nullptr ? tauwright::TuningRequest{} : tuning_request(request)));
    });
}

int32_t tauw_sheet_text(const tauw_sheet* sheet, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error,
                        [&] { shell::give_text(shell::live(sheet, "sheet").value.text(), text, capacity, needed); });
}

int32_t tauw_sheet_json(const tauw_sheet* sheet, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error,
                        [&] { shell::give_text(shell::live(sheet, "sheet").value.json(), text, capacity, needed); });
}

int32_t tauw_sheet_from_json(const char* json, size_t length, tauw_sheet** sheet, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_sheet> made(sheet, "sheet");
        shell::array(json, length, "json");
        made.give(tauwright::TuningSheet::from_json(std::string_view(json, length)));
    });
}

int32_t tauw_sheet_destroy(tauw_sheet** sheet) { return shell::destroy(sheet); }

int32_t tauw_differences_between(const tauw_sheet* earlier, const tauw_sheet* later, tauw_differences** differences,
                                 tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_differences> made(differences, "differences");
        made.give(tauwright::differences(shell::live(earlier, "earlier").value, shell::live(later, "later").value));
    });
}

int32_t tauw_differences_count(const tauw_differences* differences, size_t* count, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& list = shell::live(differences, "differences").value;
        shell::given(count, "count") = list.size();
    });
}

int32_t tauw_differences_path(const tauw_differences* differences, size_t index, char* text, size_t capacity,
                              size_t* needed, tauw_error* error) {
    return text_of_difference(differences, index, &SheetDifference::path, text, capacity, needed, error);
}

int32_t tauw_differences_earlier(const tauw_differences* differences, size_t index, char* text, size_t capacity,
                                 size_t* needed, tauw_error* error) {
    return text_of_difference(differences, index, &SheetDifference::earlier, text, capacity, needed, error);
}

int32_t tauw_differences_later(const tauw_differences* differences, size_t index, char* text, size_t capacity,
                               size_t* needed, tauw_error* error) {
    return text_of_difference(differences, index, &SheetDifference::later, text, capacity, needed, error);
}

int32_t tauw_differences_destroy(tauw_differences** differences) { return shell::destroy(differences); }
