#include "tauwright/control.h"

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/control/entered.hpp"

namespace shell = tauwright::shell;

TAUW_SAME(TAUW_EQUATION_IDEAL, tauwright::Equation::ideal);
TAUW_SAME(TAUW_EQUATION_SERIES, tauwright::Equation::series);
TAUW_SAME(TAUW_EQUATION_PARALLEL, tauwright::Equation::parallel);
TAUW_SAME(TAUW_GAIN_AS_GAIN, tauwright::GainAs::gain);
TAUW_SAME(TAUW_GAIN_AS_PROPORTIONAL_BAND, tauwright::GainAs::proportional_band);
TAUW_SAME(TAUW_INTEGRAL_AS_TIME, tauwright::IntegralAs::time);
TAUW_SAME(TAUW_INTEGRAL_AS_REPEATS, tauwright::IntegralAs::repeats);
TAUW_SAME(TAUW_INTEGRAL_AS_GAIN, tauwright::IntegralAs::gain);
TAUW_SAME(TAUW_TIME_UNIT_SECONDS, tauwright::TimeUnit::seconds);
TAUW_SAME(TAUW_TIME_UNIT_MINUTES, tauwright::TimeUnit::minutes);
TAUW_SAME(TAUW_FILTER_AS_TIME, tauwright::FilterAs::time);
TAUW_SAME(TAUW_FILTER_AS_RATIO, tauwright::FilterAs::ratio);
TAUW_SAME(TAUW_GAIN_UNIT_PERCENT, tauwright::GainUnit::percent);
TAUW_SAME(TAUW_GAIN_UNIT_ENGINEERING, tauwright::GainUnit::engineering);
TAUW_SAME(TAUW_ACTS_ON_ERROR, tauwright::ActsOn::error);
TAUW_SAME(TAUW_ACTS_ON_PROCESS_VALUE, tauwright::ActsOn::process_value);
TAUW_SAME(TAUW_ACTION_AS_SWITCH, tauwright::ActionAs::action_switch);
TAUW_SAME(TAUW_ACTION_AS_SIGN, tauwright::ActionAs::sign);
TAUW_SAME(TAUW_ACTION_REVERSE, tauwright::Action::reverse);
TAUW_SAME(TAUW_ACTION_DIRECT, tauwright::Action::direct);

int32_t tauw_pid_settings_defaults(tauw_pid_settings* settings, uint32_t size) {
    return shell::fill_defaults(settings, size);
}
int32_t tauw_controller_form_defaults(tauw_controller_form* form, uint32_t size) {
    return shell::fill_defaults(form, size);
}
int32_t tauw_entered_defaults(tauw_entered* entered, uint32_t size) { return shell::fill_defaults(entered, size); }

int32_t tauw_pid_settings_check(const tauw_pid_settings* settings, tauw_error* error) {
    return shell::guard(error, [&] { tauwright::require(shell::settings(settings)); });
}

int32_t tauw_pid_settings_at(const tauw_pid_settings* settings, const double* s_real, const double* s_imaginary,
                             size_t n, double* value_real, double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::PidSettings controller = shell::settings(settings);
        tauwright::require(controller);
        shell::evaluate(controller, {s_real, s_imaginary, n, value_real, value_imaginary});
    });
}

int32_t tauw_transfer_function(const tauw_pid_settings* settings, tauw_model** model, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        made.give(tauwright::transfer_function(shell::settings(settings)));
    });
}

int32_t tauw_entered_as(const tauw_pid_settings* settings, const tauw_controller_form* form, tauw_entered* entered,
                        tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Result<tauw_entered> result(entered, "entered");
        result.give(shell::from(tauwright::entered_as(shell::settings(settings), shell::controller_form(form))));
    });
}

int32_t tauw_settings_from(const tauw_entered* entered, const tauw_controller_form* form, tauw_pid_settings* settings,
                           tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Result<tauw_pid_settings> result(settings, "settings");
        result.give(shell::from(tauwright::settings_from(shell::entered(entered), shell::controller_form(form))));
    });
}
