#include "tauwright/synthesize.h"

#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"

namespace shell = tauwright::shell;
using tauwright::Error;
using tauwright::ObstacleCode;
using tauwright::Severity;
using tauwright::Synthesis;

TAUW_SAME(TAUW_OBSTACLE_INFINITE_CONTROLLER, ObstacleCode::infinite_controller);
TAUW_SAME(TAUW_OBSTACLE_NO_INTEGRAL_ACTION, ObstacleCode::no_integral_action);
TAUW_SAME(TAUW_OBSTACLE_PREDICTION_NEEDED, ObstacleCode::prediction_needed);
TAUW_SAME(TAUW_OBSTACLE_FASTER_THAN_DEAD_TIME, ObstacleCode::faster_than_dead_time);
TAUW_SAME(TAUW_OBSTACLE_IMPROPER, ObstacleCode::improper);
TAUW_SAME(TAUW_OBSTACLE_RIGHT_HALF_PLANE_ZERO_CANCELLED, ObstacleCode::right_half_plane_zero_cancelled);
TAUW_SAME(TAUW_OBSTACLE_UNSTABLE_POLE_CANCELLED, ObstacleCode::unstable_pole_cancelled);
TAUW_SAME(TAUW_OBSTACLE_SLOW_POLE_CANCELLED, ObstacleCode::slow_pole_cancelled);
TAUW_SAME(TAUW_OBSTACLE_NEGATIVE_TIME, ObstacleCode::negative_time);
TAUW_SAME(TAUW_SEVERITY_CAUTION, Severity::caution);
TAUW_SAME(TAUW_SEVERITY_NEEDS_FILTER, Severity::needs_filter);
TAUW_SAME(TAUW_SEVERITY_IMPOSSIBLE, Severity::impossible);

namespace {

const tauwright::InternalModelController& controller_of(const tauw_synthesis* synthesis) {
    const Synthesis& answer = shell::live(synthesis, "synthesis").value;
    if (!answer.controller)
        throw Error(tauwright::error_code::missing_argument,
                    "synthesis has no controller; ask tauw_synthesis_summarize first and read its obstacles");
    return *answer.controller;
}

}  // namespace

int32_t tauw_desired_response_defaults(tauw_desired_response* desired, uint32_t size) {
    return shell::fill_defaults(desired, size);
}
int32_t tauw_obstacle_defaults(tauw_obstacle* obstacle, uint32_t size) { return shell::fill_defaults(obstacle, size); }
int32_t tauw_synthesis_summary_defaults(tauw_synthesis_summary* summary, uint32_t size) {
    return shell::fill_defaults(summary, size);
}

const char* tauw_obstacle_name(int32_t code) { return name_of(static_cast<ObstacleCode>(code)); }
const char* tauw_severity_name(int32_t severity) { return name_of(static_cast<Severity>(severity)); }

int32_t tauw_synthesize(const tauw_model* process, const tauw_desired_response* desired, tauw_synthesis** synthesis,
                        tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_synthesis> made(synthesis, "synthesis");
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        const tauw_desired_response c = shell::read(desired, "desired");
        tauwright::DesiredResponse wish{
            .time_constant = shell::optional(c.has_time_constant, c.time_constant, "desired.time_constant"),
            .order = c.order};
        if (c.transfer_function != nullptr)
            wish.transfer_function = shell::live(c.transfer_function, "desired.transfer_function").value;
        made.give(tauwright::synthesize(g, wish));
    });
}

int32_t tauw_synthesis_summarize(const tauw_synthesis* synthesis, tauw_synthesis_summary* summary, tauw_error* error) {
    return shell::guard(error, [&] {
        const Synthesis& s = shell::live(synthesis, "synthesis").value;
        shell::Result<tauw_synthesis_summary> result(summary, "summary");
        tauw_synthesis_summary c = shell::blank<tauw_synthesis_summary>();
        c.buildable = s.buildable ? 1 : 0;
        c.pid_expressible = s.pid_expressible ? 1 : 0;
        c.has_controller = s.controller ? 1 : 0;
        c.has_settings = s.settings ? 1 : 0;
        c.controller_integrators = s.controller ? s.controller->integrators() : 0;
        c.obstacle_count = s.obstacles.size();
        result.give(c);
    });
}

int32_t tauw_synthesis_settings(const tauw_synthesis* synthesis, tauw_pid_settings* settings, tauw_error* error) {
    return shell::guard(error, [&] {
        const Synthesis& s = shell::live(synthesis, "synthesis").value;
        shell::Result<tauw_pid_settings> result(settings, "settings");
        if (!s.settings)
            throw Error(tauwright::error_code::missing_argument,
                        "synthesis has no settings; ask tauw_synthesis_summarize first and read its obstacles");
        result.give(shell::from(*s.settings));
    });
}

int32_t tauw_synthesis_obstacle(const tauw_synthesis* synthesis, size_t index, tauw_obstacle* obstacle,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& o = shell::element(shell::live(synthesis, "synthesis").value.obstacles, index);
        shell::Result<tauw_obstacle>(obstacle, "obstacle").give(shell::from(o));
    });
}

int32_t tauw_synthesis_obstacle_message(const tauw_synthesis* synthesis, size_t index, char* text, size_t capacity,
                                        size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& o = shell::element(shell::live(synthesis, "synthesis").value.obstacles, index);
        shell::give_text(o.message, text, capacity, needed);
    });
}

int32_t tauw_synthesis_obstacle_repair(const tauw_synthesis* synthesis, size_t index, char* text, size_t capacity,
                                       size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        const auto& o = shell::element(shell::live(synthesis, "synthesis").value.obstacles, index);
        shell::give_text(o.repair, text, capacity, needed);
    });
}

int32_t tauw_synthesis_attained(const tauw_synthesis* synthesis, tauw_model** model, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        made.give(shell::live(synthesis, "synthesis").value.attained);
    });
}

int32_t tauw_synthesis_controller_at(const tauw_synthesis* synthesis, const double* s_real, const double* s_imaginary,
                                     size_t n, double* value_real, double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::evaluate(controller_of(synthesis), {s_real, s_imaginary, n, value_real, value_imaginary});
    });
}

int32_t tauw_synthesis_attained_with_settings_at(const tauw_synthesis* synthesis, const double* s_real,
                                                 const double* s_imaginary, size_t n, double* value_real,
                                                 double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        const Synthesis& answer = shell::live(synthesis, "synthesis").value;
        shell::evaluate([&](std::complex<double> s) { return answer.attained_with_settings(s); },
                        {s_real, s_imaginary, n, value_real, value_imaginary});
    });
}

int32_t tauw_margins_of_exact_controller(const tauw_model* process, const tauw_synthesis* synthesis,
                                         double extra_delay, tauw_margins** margins, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_margins> made(margins, "margins");
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        made.give(tauwright::robustness(g, controller_of(synthesis), {.extra_delay = extra_delay}));
    });
}

int32_t tauw_synthesis_destroy(tauw_synthesis** synthesis) { return shell::destroy(synthesis); }
