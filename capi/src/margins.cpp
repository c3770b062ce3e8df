// Margins: the figures alone, or with every crossover; and where the dead time comes from.
#include "tauwright/assess/delay_budget.hpp"

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/assess.h"

namespace shell = tauwright::shell;
using tauwright::Robustness;
using tauwright::TransferFunction;
using tauwright::Verdict;

TAUW_SAME(TAUW_VERDICT_STABLE, Verdict::stable);
TAUW_SAME(TAUW_VERDICT_UNSTABLE, Verdict::unstable);
TAUW_SAME(TAUW_VERDICT_MARGINAL, Verdict::marginal);
TAUW_SAME(TAUW_VERDICT_UNDETERMINED, Verdict::undetermined);

namespace {

const Robustness& value_of(const tauw_margins* margins) { return shell::live(margins, "margins").value; }

}  // namespace

int32_t tauw_robustness_options_defaults(tauw_robustness_options* options, uint32_t size) {
    return shell::fill_defaults(options, size);
}
int32_t tauw_robustness_defaults(tauw_robustness* robustness, uint32_t size) {
    return shell::fill_defaults(robustness, size);
}
int32_t tauw_gain_crossover_defaults(tauw_gain_crossover* crossover, uint32_t size) {
    return shell::fill_defaults(crossover, size);
}
int32_t tauw_phase_crossover_defaults(tauw_phase_crossover* crossover, uint32_t size) {
    return shell::fill_defaults(crossover, size);
}
int32_t tauw_delay_range_defaults(tauw_delay_range* range, uint32_t size) { return shell::fill_defaults(range, size); }
int32_t tauw_delay_budget_defaults(tauw_delay_budget* budget, uint32_t size) {
    return shell::fill_defaults(budget, size);
}

const char* tauw_verdict_name(int32_t verdict) { return name_of(static_cast<Verdict>(verdict)); }

int32_t tauw_robustness_of(const tauw_model* process, const tauw_pid_settings* settings,
                           const tauw_robustness_options* options, tauw_robustness* robustness, tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& g = shell::live(process, "process").value;
        shell::Result<tauw_robustness> result(robustness, "robustness");
        result.give(shell::from(
            tauwright::robustness(g, shell::settings(settings), shell::robustness_options(options))));
    });
}

int32_t tauw_robustness_of_open_loop(const tauw_model* open_loop, tauw_robustness* robustness, tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& loop = shell::live(open_loop, "open_loop").value;
        shell::Result<tauw_robustness> result(robustness, "robustness");
        result.give(shell::from(tauwright::robustness(loop)));
    });
}

int32_t tauw_margins_of(const tauw_model* process, const tauw_pid_settings* settings,
                        const tauw_robustness_options* options, tauw_margins** margins, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_margins> made(margins, "margins");
        const TransferFunction& g = shell::live(process, "process").value;
        made.give(tauwright::robustness(g, shell::settings(settings), shell::robustness_options(options)));
    });
}

int32_t tauw_margins_of_open_loop(const tauw_model* open_loop, tauw_margins** margins, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_margins> made(margins, "margins");
        made.give(tauwright::robustness(shell::live(open_loop, "open_loop").value));
    });
}

int32_t tauw_margins_summarize(const tauw_margins* margins, tauw_robustness* robustness, tauw_error* error) {
    return shell::guard(error, [&] {
        const Robustness& r = value_of(margins);
        shell::Result<tauw_robustness>(robustness, "robustness").give(shell::from(r));
    });
}

int32_t tauw_margins_gain_crossover(const tauw_margins* margins, size_t index, tauw_gain_crossover* crossover,
                                    tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::GainCrossover& found = shell::element(value_of(margins).gain_crossovers, index);
        shell::Result<tauw_gain_crossover> result(crossover, "crossover");
        tauw_gain_crossover c = shell::blank<tauw_gain_crossover>();
        c.touches = found.touches ? 1 : 0;
        c.frequency_rad_s = found.frequency_rad_s;
        c.phase_margin_deg = found.phase_margin_deg;
        c.delay_margin = found.delay_margin;
        c.error_bound = found.error_bound;
        result.give(c);
    });
}

int32_t tauw_margins_phase_crossover(const tauw_margins* margins, size_t index, tauw_phase_crossover* crossover,
                                     tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::PhaseCrossover& found = shell::element(value_of(margins).phase_crossovers, index);
        shell::Result<tauw_phase_crossover> result(crossover, "crossover");
        tauw_phase_crossover c = shell::blank<tauw_phase_crossover>();
        c.touches = found.touches ? 1 : 0;
        c.frequency_rad_s = found.frequency_rad_s;
        c.gain_factor = found.gain_factor;
        c.error_bound = found.error_bound;
        result.give(c);
    });
}

int32_t tauw_margins_stable_dead_time(const tauw_margins* margins, size_t index, tauw_delay_range* range,
                                      tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::DelayRange& found = shell::element(value_of(margins).stable_dead_times, index);
        shell::Result<tauw_delay_range> result(range, "range");
        tauw_delay_range c = shell::blank<tauw_delay_range>();
        c.low = found.low;
        c.high = found.high;
        result.give(c);
    });
}

int32_t tauw_margins_destroy(tauw_margins** margins) { return shell::destroy(margins); }

int32_t tauw_delay_budget_of(const tauw_model* process, const tauw_pid_settings* settings,
                             const tauw_robustness_options* options, tauw_delay_budget* budget, tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& g = shell::live(process, "process").value;
        shell::Result<tauw_delay_budget> result(budget, "budget");
        const tauwright::DelayBudget found =
            tauwright::delay_budget(g, shell::settings(settings), shell::robustness_options(options));
        tauw_delay_budget c = shell::blank<tauw_delay_budget>();
        c.process_dead_time = found.process_dead_time;
        c.half_scan = found.half_scan;
        c.extra_delay = found.extra_delay;
        c.measurement_filter_time = found.measurement_filter_time;
        c.total = found.total();
        c.working_gain = found.working_gain;
        result.give(c);
    });
}
