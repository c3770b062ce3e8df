// The C header as C++, beside the C++ headers in one file, and both libraries in one program: the same
// record gives the same bits. Oracle: the C++ library, tested for itself.
#include <tauwright/tauwright.h>

#include <cmath>
#include <cstdio>
#include <cstring>
#include <vector>

#include <tauwright/tauwright.hpp>

namespace {

int failed = 0;

void check(bool condition, const char* what) {
    if (condition) return;
    ++failed;
    std::printf("not true: %s\n", what);
}

// A noisy record of a first order process; the noise is a fixed integer sequence.
tauwright::RecordColumns columns() {
    tauwright::RecordColumns c;
    std::uint32_t state = 12345;
    for (int i = 0; i < 300; ++i) {
        state = state * 1664525u + 1013904223u;
        const double noise = (static_cast<double>(state >> 8) / 16777216.0 - 0.5) * 0.2, t = 0.7 * i;
        c.time_s.push_back(t);
        c.output.push_back(i < 20 ? 40.0 : i < 160 ? 46.0 : 38.0);
        double y = 55.0 + noise;
        if (t > 14.0 + 4.2) y += 6.0 * 1.3 * (1.0 - std::exp(-(t - 18.2) / 12.0));
        if (t > 112.0 + 4.2) y -= 8.0 * 1.3 * (1.0 - std::exp(-(t - 116.2) / 12.0));
        c.process_value.push_back(y);
    }
    c.output_range = tauwright::Range{};
    c.process_value_range = tauwright::Range{.low = 0.0, .high = 150.0, .unit = "degC"};
    return c;
}

void must(std::int32_t status, const tauw_error& error) {
    if (status == TAUW_OK) return;
    ++failed;
    std::printf("%s: %s\n", tauw_error_name(status), error.message);
}

}  // namespace

int main() {
    namespace tw = tauwright;
    const tw::RecordColumns source = columns();
    const tw::Record record(source);
    const tw::FittedModel fit = tw::identify(record);
    const tw::TuningRequest request{.duty = tw::Duty{.setpoint_step = 2.0, .scan_time = 0.5}};
    const tw::TuningSheet sheet = tw::tune(record, request);

    tauw_error error;
    tauw_range percent, degrees;
    tauw_record_columns c;
    tauw_duty duty;
    tauw_tuning_request c_request;
    tauw_fit_summary summary;
    tauw_error_defaults(&error, sizeof error);
    tauw_range_defaults(&percent, sizeof percent);
    tauw_range_defaults(&degrees, sizeof degrees);
    tauw_record_columns_defaults(&c, sizeof c);
    tauw_duty_defaults(&duty, sizeof duty);
    tauw_tuning_request_defaults(&c_request, sizeof c_request);
    tauw_fit_summary_defaults(&summary, sizeof summary);
    degrees.high = 150.0;
    std::strcpy(degrees.unit, "degC");
    c.n = source.time_s.size();
    c.time_s = source.time_s.data();
    c.output = source.output.data();
    c.process_value = source.process_value.data();
    c.output_range = &percent;
    c.process_value_range = &degrees;
    duty.setpoint_step = 2.0;
    duty.has_scan_time = 1;
    duty.scan_time = 0.5;
    c_request.duty = &duty;

    tauw_record* c_record = nullptr;
    tauw_fit* c_fit = nullptr;
    tauw_sheet* c_sheet = nullptr;
    must(tauw_record_create(&c, &c_record, &error), error);
    must(tauw_identify(c_record, nullptr, &c_fit, &error), error);
    must(tauw_fit_summarize(c_fit, &summary, &error), error);
    must(tauw_tune(c_record, &c_request, &c_sheet, &error), error);
    check(fit.model.has_value() && std::abs(fit.gain - 1.3) < 0.02, "the fit finds the record's gain");
    check(summary.gain == fit.gain && summary.dead_time == fit.dead_time, "C and C++ fits have the same bits");
    check(summary.residual_rms == fit.residual_rms, "C and C++ residuals have the same bits");

    std::size_t needed = 0;
    must(tauw_sheet_json(c_sheet, nullptr, 0, &needed, &error), error);
    std::vector<char> json(needed);
    must(tauw_sheet_json(c_sheet, json.data(), json.size(), nullptr, &error), error);
    check(sheet.json() == json.data(), "C and C++ sheets are the same document");
    check(sheet.proposed.has_value(), "the sheet proposes settings");

    tauw_sheet_destroy(&c_sheet);
    tauw_fit_destroy(&c_fit);
    tauw_record_destroy(&c_record);
    std::printf("%d failed\n", failed);
    return failed == 0 ? 0 : 1;
}
