#include "tauwright/assess.h"

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"

namespace shell = tauwright::shell;
using tauwright::Verdict;

TAUW_SAME(TAUW_VERDICT_STABLE, Verdict::stable);
TAUW_SAME(TAUW_VERDICT_UNSTABLE, Verdict::unstable);
TAUW_SAME(TAUW_VERDICT_MARGINAL, Verdict::marginal);
TAUW_SAME(TAUW_VERDICT_UNDETERMINED, Verdict::undetermined);

int32_t tauw_robustness_options_defaults(tauw_robustness_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_robustness_defaults(tauw_robustness* robustness, uint32_t size) {
    return shell::fill_defaults(robustness, size);
}
int32_t tauw_duty_defaults(tauw_duty* duty, uint32_t size) { return shell::fill_defaults(duty, size); }
int32_t tauw_figures_defaults(tauw_figures* figures, uint32_t size) { return shell::fill_defaults(figures, size); }
int32_t tauw_trend_columns_defaults(tauw_trend_columns* columns, uint32_t size) {
    return shell::fill_defaults(columns, size);
}

const char* tauw_verdict_name(int32_t verdict) { return name_of(static_cast<Verdict>(verdict)); }

int32_t tauw_robustness_of(const tauw_model* process, const tauw_pid_settings* settings,
                           const tauw_robustness_options* options, tauw_robustness* robustness, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        shell::Result<tauw_robustness> result(robustness, "robustness");
        tauwright::RobustnessOptions with;
        if (options != nullptr) {
            const tauw_robustness_options c = shell::read(options, "options");
            with = {.scan_time = shell::optional(c.has_scan_time, c.scan_time, "options.scan_time"),
                    .extra_delay = c.extra_delay};
        }
        result.give(shell::from(tauwright::robustness(g, shell::settings(settings), with)));
    });
}

int32_t tauw_robustness_of_open_loop(const tauw_model* open_loop, tauw_robustness* robustness, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::TransferFunction& loop = shell::live(open_loop, "open_loop").value;
        shell::Result<tauw_robustness> result(robustness, "robustness");
        result.give(shell::from(tauwright::robustness(loop)));
    });
}

int32_t tauw_simulate(const tauw_model* process, const tauw_pid_settings* settings, const tauw_duty* duty,
                      double horizon_s, tauw_trend** trend, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_trend> made(trend, "trend");
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        made.give(tauwright::simulate(g, shell::settings(settings), shell::duty(duty), horizon_s));
    });
}

int32_t tauw_trend_view(const tauw_trend* trend, tauw_trend_columns* columns, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::Trend& t = shell::live(trend, "trend").value;
        shell::Result<tauw_trend_columns> result(columns, "columns");
        tauw_trend_columns c = shell::blank<tauw_trend_columns>();
        c.limited = t.limited ? 1 : 0;
        c.n = t.size();
        c.time_s = t.time_s.data();
        c.setpoint = t.setpoint.data();
        c.process_value = t.process_value.data();
        c.output = t.output.data();
        result.give(c);
    });
}

int32_t tauw_trend_figures(const tauw_trend* trend, tauw_figures* figures, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::Trend& t = shell::live(trend, "trend").value;
        shell::Result<tauw_figures> result(figures, "figures");
        result.give(shell::from(tauwright::figures(t)));
    });
}

int32_t tauw_trend_destroy(tauw_trend** trend) { return shell::destroy(trend); }
