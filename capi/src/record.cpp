// Records: the first half of identify.h.
#include <string_view>

#include "convert.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/identify.h"

namespace shell = tauwright::shell;
using tauwright::Record;
using tauwright::RecordColumns;

namespace {

template <class T>
std::vector<T> copied_if_given(const T* values, size_t n, const char* name) {
    return values == nullptr ? std::vector<T>{} : shell::copied(values, n, name);
}

template <class Text>
int32_t text_of_record(const tauw_record* record, const Text& text_of, char* text, size_t capacity, size_t* needed,
                       tauw_error* error) {
    return shell::guard(
        error, [&] { shell::give_text(text_of(shell::live(record, "record").value), text, capacity, needed); });
}

}  // namespace

int32_t tauw_record_columns_defaults(tauw_record_columns* columns, uint32_t size) {
    return shell::fill_defaults(columns, size);
}

int32_t tauw_read_record(const char* path, tauw_record** record, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_record> made(record, "record");
        if (path == nullptr) shell::refuse_null("path", "give the path of a CSV file");
        made.give(tauwright::read_record(path));
    });
}

int32_t tauw_read_record_text(const char* text, size_t length, const char* name, tauw_record** record,
                              tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_record> made(record, "record");
        shell::array(text, length, "text");
        made.give(tauwright::read_record_text(std::string_view(text, length), name == nullptr ? "record" : name));
    });
}

int32_t tauw_record_create(const tauw_record_columns* columns, tauw_record** record, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_record> made(record, "record");
        const tauw_record_columns c = shell::read(columns, "columns");
        made.give(Record(RecordColumns{
            .time_s = shell::copied(c.time_s, c.n, "columns.time_s"),
            .output = shell::copied(c.output, c.n, "columns.output"),
            .process_value = shell::copied(c.process_value, c.n, "columns.process_value"),
            .good = copied_if_given(c.good, c.n, "columns.good"),
            .setpoint = copied_if_given(c.setpoint, c.n, "columns.setpoint"),
            .automatic = copied_if_given(c.automatic, c.n, "columns.automatic"),
            .output_range = shell::optional_range(c.output_range, "columns.output_range"),
            .process_value_range = shell::optional_range(c.process_value_range, "columns.process_value_range")}));
    });
}

int32_t tauw_record_view(const tauw_record* record, tauw_record_columns* columns, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauw_record& handle = shell::live(record, "record");
        shell::Result<tauw_record_columns> result(columns, "columns");
        const Record& r = handle.value;
        tauw_record_columns c = shell::blank<tauw_record_columns>();
        c.n = r.size();
        c.time_s = r.time_s().data();
        c.output = r.output().data();
        c.process_value = r.process_value().data();
        c.good = handle.good.data();
        if (!r.setpoint().empty()) c.setpoint = r.setpoint().data();
        if (!r.automatic().empty()) c.automatic = r.automatic().data();
        if (r.output_range()) c.output_range = &handle.output_range;
        if (r.process_value_range()) c.process_value_range = &handle.process_value_range;
        result.give(c);
    });
}

int32_t tauw_record_source(const tauw_record* record, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return text_of_record(record, [](const Record& r) { return r.source(); }, text, capacity, needed, error);
}

int32_t tauw_record_first_stamp(const tauw_record* record, char* text, size_t capacity, size_t* needed,
                                tauw_error* error) {
    return text_of_record(record, [](const Record& r) { return r.first_stamp(); }, text, capacity, needed, error);
}

int32_t tauw_record_sha256(const tauw_record* record, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return text_of_record(record, [](const Record& r) { return r.sha256(); }, text, capacity, needed, error);
}

int32_t tauw_record_destroy(tauw_record** record) { return shell::destroy(record); }
