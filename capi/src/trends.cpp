// Closed-loop trends, sampled and continuous, their figures, and valve cycles.
#include <cstring>

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "tauwright/assess.h"
#include "tauwright/assess/continuous_trend.hpp"
#include "tauwright/assess/valve_cycle.hpp"

namespace shell = tauwright::shell;
using tauwright::CycleExistence;
using tauwright::TransferFunction;

TAUW_SAME(TAUW_CYCLE_NONE, CycleExistence::none);
TAUW_SAME(TAUW_CYCLE_PERSISTS, CycleExistence::persists);
TAUW_SAME(TAUW_CYCLE_UNDETERMINED, CycleExistence::undetermined);

namespace tauwright::shell {

template <>
tauw_valve_cycle fresh() noexcept {
    tauw_valve_cycle c = blank<tauw_valve_cycle>();
    c.existence = TAUW_CYCLE_UNDETERMINED;
    return c;
}

}  // namespace tauwright::shell

int32_t tauw_duty_defaults(tauw_duty* duty, uint32_t size) { return shell::fill_defaults(duty, size); }
int32_t tauw_figures_defaults(tauw_figures* figures, uint32_t size) { return shell::fill_defaults(figures, size); }
int32_t tauw_trend_columns_defaults(tauw_trend_columns* columns, uint32_t size) {
    return shell::fill_defaults(columns, size);
}
int32_t tauw_valve_cycle_defaults(tauw_valve_cycle* cycle, uint32_t size) { return shell::fill_defaults(cycle, size); }

const char* tauw_cycle_existence_name(int32_t existence) { return name_of(static_cast<CycleExistence>(existence)); }

int32_t tauw_simulate(const tauw_model* process, const tauw_pid_settings* settings, const tauw_duty* duty,
                      double horizon_s, tauw_trend** trend, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_trend> made(trend, "trend");
        const TransferFunction& g = shell::live(process, "process").value;
        made.give(tauwright::simulate(g, shell::settings(settings), shell::duty(duty), horizon_s));
    });
}

int32_t tauw_continuous_trend(const tauw_model* process, const tauw_pid_settings* settings, const tauw_duty* duty,
                              double horizon_s, size_t points, tauw_trend** trend, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_trend> made(trend, "trend");
        const TransferFunction& g = shell::live(process, "process").value;
        made.give(tauwright::continuous_trend(g, shell::settings(settings), shell::duty(duty), horizon_s, points));
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
        c.measured = t.measured.data();
        c.valve_position = t.valve_position.data();
        c.load = t.load.data();
        c.ran_away = t.ran_away ? 1 : 0;
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

tauw_valve_cycle tauwright::shell::from(const ValveCycle& found) noexcept {
    tauw_valve_cycle c = shell::blank<tauw_valve_cycle>();
    c.existence = static_cast<int32_t>(found.existence);
    c.retuning_cures = found.retuning_cures ? 1 : 0;
    shell::set(found.period, c.has_period, c.period);
    shell::set(found.process_value_amplitude, c.has_process_value_amplitude, c.process_value_amplitude);
    shell::set(found.output_amplitude, c.has_output_amplitude, c.output_amplitude);
    const std::string_view reason = shell::cut(found.reason, sizeof c.reason - 1);
    std::memcpy(c.reason, reason.data(), reason.size());
    return c;
}

int32_t tauw_valve_cycle_of(const tauw_model* process, const tauw_pid_settings* settings,
                            const tauw_valve_settings* valve, tauw_valve_cycle* cycle, tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& g = shell::live(process, "process").value;
        shell::Result<tauw_valve_cycle> result(cycle, "cycle");
        const tauwright::ValveCycle found =
            tauwright::valve_cycle(g, shell::settings(settings), shell::valve_settings(valve));
        result.give(shell::from(found));
    });
}
