// Fits: the second half of identify.h.
#include "tauwright/identify.h"

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"

namespace shell = tauwright::shell;
using tauwright::Advice;
using tauwright::FindingCode;
using tauwright::FittedModel;
using tauwright::Form;

TAUW_SAME(TAUW_FORM_AUTOMATIC, Form::automatic);
TAUW_SAME(TAUW_FORM_FIRST_ORDER_PLUS_DEAD_TIME, Form::first_order_plus_dead_time);
TAUW_SAME(TAUW_FORM_INTEGRATING_PLUS_DEAD_TIME, Form::integrating_plus_dead_time);
TAUW_SAME(TAUW_ADVICE_TUNE, Advice::tune);
TAUW_SAME(TAUW_ADVICE_TUNE_WITH_CARE, Advice::tune_with_care);
TAUW_SAME(TAUW_ADVICE_TEST_AGAIN, Advice::test_again);
TAUW_SAME(TAUW_ADVICE_REPAIR_MEASUREMENT, Advice::repair_measurement);
TAUW_SAME(TAUW_ADVICE_REPAIR_VALVE, Advice::repair_valve);
TAUW_SAME(TAUW_ADVICE_LEAVE_ALONE, Advice::leave_alone);
TAUW_SAME(TAUW_FINDING_NO_MOVE, FindingCode::no_move);
TAUW_SAME(TAUW_FINDING_BELOW_NOISE, FindingCode::below_noise);
TAUW_SAME(TAUW_FINDING_ENDS_EARLY, FindingCode::ends_early);
TAUW_SAME(TAUW_FINDING_NOT_STEADY_AT_START, FindingCode::not_steady_at_start);
TAUW_SAME(TAUW_FINDING_OUTPUT_CLIPPED, FindingCode::output_clipped);
TAUW_SAME(TAUW_FINDING_BAD_SAMPLES_LEFT_OUT, FindingCode::bad_samples_left_out);
TAUW_SAME(TAUW_FINDING_OUTPUT_MOVED_BY_CONTROLLER, FindingCode::output_moved_by_controller);
TAUW_SAME(TAUW_FINDING_GAIN_DIFFERS, FindingCode::gain_differs);
TAUW_SAME(TAUW_FINDING_MODEL_DOES_NOT_FIT, FindingCode::model_does_not_fit);

int32_t tauw_identify_options_defaults(tauw_identify_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_fit_summary_defaults(tauw_fit_summary* summary, uint32_t size) {
    return shell::fill_defaults(summary, size);
}
int32_t tauw_move_defaults(tauw_move* move, uint32_t size) { return shell::fill_defaults(move, size); }
int32_t tauw_finding_defaults(tauw_finding* finding, uint32_t size) { return shell::fill_defaults(finding, size); }

const char* tauw_form_name(int32_t form) { return name_of(static_cast<Form>(form)); }
const char* tauw_advice_name(int32_t advice) { return name_of(static_cast<Advice>(advice)); }
const char* tauw_finding_name(int32_t code) { return name_of(static_cast<FindingCode>(code)); }

int32_t tauw_identify(const tauw_record* record, const tauw_identify_options* options, tauw_fit** fit,
                      tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_fit> made(fit, "fit");
        const tauwright::Record& r = shell::live(record, "record").value;
        made.give(tauwright::identify(
            r, options == nullptr ? tauwright::IdentifyOptions{} : shell::identify_options(options)));
    });
}

int32_t tauw_fit_summarize(const tauw_fit* fit, tauw_fit_summary* summary, tauw_error* error) {
    return shell::guard(error, [&] {
        const FittedModel& f = shell::live(fit, "fit").value;
        shell::Result<tauw_fit_summary> result(summary, "summary");
        tauw_fit_summary c = shell::blank<tauw_fit_summary>();
        c.form = static_cast<int32_t>(f.form);
        c.advice = static_cast<int32_t>(f.advice());
        c.has_model = f.model ? 1 : 0;
        c.gain = f.gain;
        c.dead_time = f.dead_time;
        c.first_output = f.first_output;
        c.offset = f.offset;
        c.drift_per_s = f.drift_per_s;
        c.drift_per_s2 = f.drift_per_s2;
        c.sum_of_squares = f.sum_of_squares;
        c.residual_rms = f.residual_rms;
        c.noise = f.noise;
        c.r_squared = f.r_squared;
        c.residual_correlation = f.residual_correlation;
        c.response_to_noise = f.response_to_noise;
        c.tested_output_low = f.tested_output.low;
        c.tested_output_high = f.tested_output.high;
        c.tested_process_value_low = f.tested_process_value.low;
        c.tested_process_value_high = f.tested_process_value.high;
        c.samples_used = f.samples_used;
        c.lag_count = f.lags.size();
        c.parameter_count = f.parameter_names.size();
        c.move_count = f.moves.size();
        c.finding_count = f.findings.size();
        result.give(c);
    });
}

int32_t tauw_fit_model(const tauw_fit* fit, tauw_model** model, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        const FittedModel& f = shell::live(fit, "fit").value;
        if (f.model) made.give(*f.model);
    });
}

int32_t tauw_fit_lags(const tauw_fit* fit, double* lags, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(
        error, [&] { shell::give_array(shell::live(fit, "fit").value.lags, lags, capacity, needed, "lags"); });
}

int32_t tauw_fit_standard_error(const tauw_fit* fit, const char* name, double* standard_error, tauw_error* error) {
    return shell::guard(error, [&] {
        const FittedModel& f = shell::live(fit, "fit").value;
        if (name == nullptr) shell::refuse_null("name", "give a parameter's name");
        double& result = shell::given(standard_error, "standard_error");
        const auto found = f.standard_error(name);
        if (!found) {
            std::string offered;
            for (const std::string& known : f.parameter_names) offered += (offered.empty() ? "" : ", ") + known;
            throw tauwright::Error(tauwright::error_code::unknown_name,
                                   std::string("name is \"") + name + "\"; this fit has standard errors of: " +
                                       (offered.empty() ? "nothing" : offered));
        }
        result = *found;
    });
}

int32_t tauw_fit_parameter_name(const tauw_fit* fit, size_t index, char* text, size_t capacity, size_t* needed,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        shell::give_text(shell::element(shell::live(fit, "fit").value.parameter_names, index), text, capacity, needed);
    });
}

int32_t tauw_fit_covariance(const tauw_fit* fit, double* covariance, size_t capacity, size_t* needed,
                            tauw_error* error) {
    return shell::guard(error, [&] {
        shell::give_array(shell::live(fit, "fit").value.covariance, covariance, capacity, needed, "covariance");
    });
}

int32_t tauw_fit_move(const tauw_fit* fit, size_t index, tauw_move* move, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::Move& m = shell::element(shell::live(fit, "fit").value.moves, index);
        shell::Result<tauw_move> result(move, "move");
        tauw_move c = shell::blank<tauw_move>();
        c.sample = m.sample;
        c.size = m.size;
        c.gain = m.gain;
        c.standard_error = m.standard_error;
        result.give(c);
    });
}

int32_t tauw_fit_finding(const tauw_fit* fit, size_t index, tauw_finding* finding, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& f = shell::element(shell::live(fit, "fit").value.findings, index);
        shell::Result<tauw_finding>(finding, "finding").give(shell::from(f));
    });
}

int32_t tauw_fit_finding_message(const tauw_fit* fit, size_t index, char* text, size_t capacity, size_t* needed,
                                 tauw_error* error) {
    return shell::guard(error, [&] {
        shell::give_text(shell::element(shell::live(fit, "fit").value.findings, index).message, text, capacity, needed);
    });
}

int32_t tauw_fit_form_reason(const tauw_fit* fit, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(
        error, [&] { shell::give_text(shell::live(fit, "fit").value.form_reason, text, capacity, needed); });
}

int32_t tauw_fitted_response(const tauw_fit* fit, const tauw_record* record, double* process_value, size_t capacity,
                             size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const FittedModel& f = shell::live(fit, "fit").value;
        shell::give_array(tauwright::fitted_response(f, shell::live(record, "record").value), process_value, capacity,
                          needed, "process_value");
    });
}

int32_t tauw_fit_destroy(tauw_fit** fit) { return shell::destroy(fit); }
