#include "tauwright/assess/valve_cycle.hpp"

#include <cmath>
#include <string>

#include "assess/dead_band_cycle.hpp"
#include "assess/loop_states.hpp"
#include "assess/relay_cycle.hpp"
#include "tauwright/assess/robustness.hpp"
#include "tauwright/control/pid_response.hpp"
#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using detail::joined;

// Where the curves pass closer than this, the describing function's neglect of harmonics may decide.
constexpr double close_call = 0.15;
// Share of the period a jump may take before a limited travel rate counts.
constexpr double long_jump = 0.02;

ValveCycle said(CycleExistence existence, std::string reason, bool retuning_cures = false) {
    ValveCycle cycle;
    cycle.existence = existence;
    cycle.reason = std::move(reason);
    cycle.retuning_cures = retuning_cures;
    return cycle;
}

std::string number(double x) { return text_of(x, 3); }

void put_size(ValveCycle& cycle, double period, double value, double output) {
    cycle.period = period;
    cycle.process_value_amplitude = value;
    cycle.output_amplitude = output;
}

// A valve that jumps: by `jump`, when the output is `away` from its position on the way that matters.
struct Jumps {
    double jump = 0.0, away = 0.0;
};

Jumps jumps_of(const ValveSettings& valve) {
    Jumps j{valve.stick, valve.stick};
    if (valve.resolution > valve.stick) j = {valve.resolution, valve.resolution};
    else if (valve.resolution > 0.0) j.jump = valve.resolution * std::floor(valve.stick / valve.resolution * (1.0 + 1e-9));
    j.away += 0.5 * valve.dead_band;  // taken up before the stem is pushed
    return j;
}

std::string fault_text(const ValveSettings& valve) {
    std::string text;
    const auto add = [&](double size, std::string_view name) {
        if (size > 0.0) text.append(joined({text.empty() ? "" : " with ", name, " of ", number(size), " %"}));
    };
    add(valve.stick, "sticking");
    add(valve.resolution, "a resolution");
    add(valve.dead_band, "a dead band");
    return text;
}

std::string unstable_text(Verdict verdict) {
    switch (verdict) {
        case Verdict::unstable: return "the loop is not stable even with a perfect valve; retune it before looking at the valve";
        case Verdict::marginal: return "the loop is at the limit of stability with a perfect valve; retune it before looking at the valve";
        default: return "whether the loop is stable is not determined, so neither is what the valve does to it";
    }
}

ValveCycle cycle_of_jumps(const TransferFunction& process, const PidSettings& settings, const ValveSettings& valve,
                          int integrators, const std::string& fault) {
    const Jumps jumps = jumps_of(valve);
    const auto relay = detail::relay_cycle(detail::loop_states(process, settings), jumps.away / jumps.jump - 0.5);
    const bool unstable = process.unstable_poles() > 0;
    if (integrators <= 0 && !unstable) {
        // At rest the output is (1 + gain) times as far from the position as the position from what the load needs,
        // which is at most half a jump.
        const double gain = (process * transfer_function(settings)).steady_gain();
        if (!relay && 0.5 * jumps.jump * (1.0 + gain) <= jumps.away)
            return said(CycleExistence::none,
                        joined({fault, " leaves a resting offset but no cycle: nothing in the loop integrates"}));
        return said(CycleExistence::undetermined,
                    joined({fault, " lets this loop without integral action rest at some loads and cycle at others",
                            relay ? joined({", there with a period of ", number(relay->period), " s"}) : "",
                            "; a loop gain below 1 ends it, ", number(gain), " now"}),
                    true);
    }
    ValveCycle cycle = said(CycleExistence::persists, "");
    const std::string makes =
        joined({fault, settings.integral_gain_per_s() != 0.0 ? " makes any controller with integral action cycle"
                        : unstable                             ? " makes a loop around an unstable process cycle"
                                                               : " makes a loop around an integrating process cycle"});
    const double jump_time = valve.travel_rate_per_s ? jumps.jump / *valve.travel_rate_per_s : 0.0;
    if (!relay || jump_time > long_jump * relay->period) {
        cycle.reason = joined({makes, relay ? "; the slow travel changes its size, which is not worked out"
                                            : "; it does not repeat, so no size is given",
                               "; retuning does not end it; repair the valve"});
        return cycle;
    }
    put_size(cycle, relay->period, jumps.jump * relay->value_amplitude, jumps.jump * relay->output_amplitude);
    cycle.reason = joined({makes, ": period ", number(*cycle.period), " s, process value +-",
                           number(*cycle.process_value_amplitude),
                           ", or slower and lopsided where the load needs a position off the middle of two rests",
                           *cycle.output_amplitude > 50.0 ? ", if the valve's travel allows it" : "",
                           "; retuning changes the period, not the fact; repair the valve"});
    return cycle;
}

ValveCycle cycle_of_dead_band(const TransferFunction& process, const PidSettings& settings, const ValveSettings& valve,
                              double gain_margin, int integrators, const std::string& fault) {
    const TransferFunction loop = (process * transfer_function(settings)).cancelled();
    detail::DeadBandCycle found = detail::dead_band_cycle(process.cancelled(), loop);
    // The describing function looks at steps of frequency; a narrow resonance between them shows in the gain margin.
    found.closeness = std::max(found.closeness, 1.0 / gain_margin);
    const bool unstable = process.unstable_poles() > 0;
    if (unstable && integrators <= 0)
        return said(CycleExistence::undetermined,
                    joined({fault, " around an unstable process without integral action lets the loop rest on one edge of it, until something "
                            "pushes it off; repair the valve"}));
    // Two integrators, or one and an unstable process, find no rest inside the dead band.
    const bool restless = integrators >= 2 || unstable;
    const bool integral_action = settings.integral_gain_per_s() != 0.0;
    const bool integral_to_blame = integrators == 2 && integral_action && !unstable, cured = !restless || integral_to_blame;
    if (!restless && found.closeness < 1.0 - close_call)
        return said(CycleExistence::none,
                    joined({fault, " makes no lasting cycle: with ", integrators == 1 ? "one integrator" : "no integrator",
                            " the loop comes to rest inside the dead band"}));
    const bool close = !restless && found.closeness < 1.0 + close_call;
    const std::string_view makes = !restless ? " makes this tightly tuned loop cycle once it is disturbed enough"
                                   : unstable ? " makes a loop around an unstable process cycle"
                                              : " makes a loop with two integrators cycle";
    const bool too_fast = valve.travel_rate_per_s && valve.dead_band * found.fastest_travel > *valve.travel_rate_per_s;
    if (close || !found.exists || found.period == 0.0 || too_fast) {
        if (restless)
            return said(CycleExistence::persists,
                        joined({fault, makes, "; ", too_fast ? "the slow travel changes its size, which is not worked out" : "its size could not be found",
                                "; ", integral_to_blame ? "take out integral action, or repair the valve" : "repair the valve"}),
                        cured);
        return said(CycleExistence::undetermined,
                    joined({fault, " may or may not make this loop cycle: it is ", close ? "too close to call" : "outside what is worked out",
                            "; a lower gain or less integral action ends it"}),
                    cured);
    }
    ValveCycle cycle = said(CycleExistence::persists, "", cured);
    put_size(cycle, found.period, valve.dead_band * found.value_amplitude, valve.dead_band * found.output_amplitude);
    cycle.reason = joined({fault, makes, ": period ", number(*cycle.period), " s, process value +-", number(*cycle.process_value_amplitude), "; ",
                           !restless           ? "a lower gain ends it"
                           : integral_to_blame ? "taking out integral action ends it; so does repairing the valve"
                                               : "repair the valve"});
    return cycle;
}

}  // namespace

ValveCycle valve_cycle(const TransferFunction& process, const PidSettings& settings, const ValveSettings& valve) {
    require(settings);
    check(valve);
    (void)detail::loop_states(process, settings);  // refuses what has no response in time
    if (valve.stick == 0.0 && valve.resolution == 0.0 && valve.dead_band == 0.0)
        return said(CycleExistence::none, "the valve has no sticking, resolution or dead band: nothing to make the loop cycle");
    const std::string fault = fault_text(valve);
    const Robustness margins = robustness(process, settings);
    if (margins.verdict != Verdict::stable) return said(CycleExistence::undetermined, unstable_text(margins.verdict));
    const int integrators = process.integrators() - process.zeros_at_origin() + (settings.integral_gain_per_s() != 0.0 ? 1 : 0);
    if (valve.stick > 0.0 || valve.resolution > 0.0) return cycle_of_jumps(process, settings, valve, integrators, fault);
    return cycle_of_dead_band(process, settings, valve, *margins.gain_margin, integrators, fault);
}

}  // namespace v0
}  // namespace tauwright
