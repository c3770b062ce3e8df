#include "tune/cautions.hpp"

#include <algorithm>
#include <cmath>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

const char* const standing[] = {
    "Advice, not authority. These settings are a calculation from the data and model shown. A competent person responsible "
    "for the plant must review them before use and may reject them.",
    "Not for safety functions. Do not use on a safety instrumented function, trip, burner or machine protection, relief, or "
    "any loop that is credited as a protection layer, without the functional-safety procedure of the site (IEC 61511 practice: "
    "planned, reviewed, authorized change with impact analysis). The library has no safety integrity claim.",
    "Change control. Raise and close the site's management-of-change item; record as-found values, as-left values, reason, "
    "approver, date and time with zone. Keep the roll-back values at the desk while the change is on trial.",
    "Local rules win. Licensed-practice law, site standards, environmental permits, hazardous-area and cyber-security rules, "
    "and the operating manual take precedence over this sheet.",
    "Operator in command. Agree the test and the change with the operator on shift; the operator may stop it at any time; "
    "someone watches the loop until it has settled through at least one load change.",
};

// Before a test is repeated.
const char* const before_testing[] = {
    "Before the test: state the mode. A loop in manual means nobody is correcting the process; write abort limits for process "
    "value and output, and who acts on them.",
    "Before the test: check what follows the output (cascades, overrides, selectors, split range, feedforward, ratio stations, "
    "interlocks on rate or position). Put masters in manual first, or accept their response in writing.",
    "Before the test: check alarm and trip settings against the expected excursion; do not bypass an interlock to make a test fit.",
    "Do not test while another test, start-up, grade change, maintenance or alarm flood is in progress.",
    "Integrating process (level, pressure, batch temperature): a single sustained step has no resting point; use a pulse or a "
    "doublet and a time limit.",
    "Possibly unstable in open loop, or exothermic: do not open the loop. Use a closed-loop test or none.",
    "Hand valves, bypasses and spare pump line-ups must be as in normal running, or the model is of another plant.",
};

const char* const before_typing[] = {
    "Confirm the controller's equation, gain or proportional band, time unit, integral as time or rate, derivative filter, and "
    "on which signal proportional and derivative act. The same number in another form is another controller.",
    "Confirm direct or reverse action and the valve's fail position; a wrong sign drives the output to a limit at once.",
    "Confirm that transmitter span, output span and characteristic are those used here; a new range needs a new gain.",
    "Confirm the scan time and every filter; the settings are valid for the stated scan only.",
    "Confirm output limits, rate limits, set-point limits, anti-windup and tracking; tuning is no substitute for any of them.",
    "Put the loop in manual, or confirm that the controller takes new settings without a bump; change one loop at a time, "
    "inner before outer.",
    "Margins are quoted for the rounded values shown.",
};

const char* const afterwards[] = {
    "Start with a small set-point change in a safe direction, then wait for a natural load change. Watch the output's travel "
    "as well as the process value.",
    "Roll back at once on growing oscillation, output at a limit, new alarms, valve reversals clearly more frequent, or a "
    "neighbor starting to cycle.",
    "Valid only for the operating range tested. Check again after valve, transmitter, trim, span, scan, firmware, throughput "
    "or product changes.",
    "A quiet hour is not proof. Give the date of the next review.",
};

bool one_direction_only(const FittedModel& fit) {
    const auto up = [](const Move& m) { return m.size > 0.0; };
    return !fit.moves.empty() && (std::all_of(fit.moves.begin(), fit.moves.end(), up) ||
                                  std::none_of(fit.moves.begin(), fit.moves.end(), up));
}

// Kc times the noise of the record, in percent; 0 where units do not allow it.
double noise_at_output_percent(const TuningSheet& sheet) {
    if (!sheet.proposed || !sheet.process_value_range || !sheet.output_range) return 0.0;
    return std::abs(sheet.proposed->settings.gain) * sheet.fit.noise / sheet.process_value_range->span() * 100.0;
}

bool found(const TuningSheet& sheet, FindingCode code) {
    return std::any_of(sheet.findings().begin(), sheet.findings().end(), [&](const Finding& f) { return f.code == code; });
}

void add_called_for(const TuningSheet& sheet, std::vector<std::string>& list) {
    if (one_direction_only(sheet.fit) || found(sheet, FindingCode::ends_early) ||
        (sheet.fit.model && sheet.fit.response_to_noise < 10.0))
        list.push_back("Model is weak: the record is short, moves in one direction only, or its response is less than ten times the "
                       "noise. Prefer a slower time constant, or repeat the test.");
    if (found(sheet, FindingCode::bad_samples_left_out))
        list.push_back("Bad-quality samples were left out: dead time may be overstated or understated by up to the time between "
                       "the samples that are left. Do not tighten on this record.");
    if (sheet.as_found && sheet.as_found->margins.verdict != Verdict::stable)
        list.push_back("As found, the loop would not be stable on this model. If it is stable in service, the action, form or unit of the "
                       "as-found numbers is wrong, or the model is: do not enter anything before that is explained.");
    if (sheet.proposed && !sheet.as_found)
        list.push_back("No as-found settings were given: write them down before the change, or there is nothing to roll back to.");
    const double noise = noise_at_output_percent(sheet);
    if (noise > 1.0)
        list.push_back("Measurement noise moves the output by about " + text_of(std::round(10.0 * noise) / 10.0) +
                       " % (standard deviation): ask for a slower time constant, or filter the measurement.");
    if (sheet.form && sheet.form->derivative_on == ActsOn::error &&
        ((sheet.as_found && sheet.as_found->settings.derivative_time > 0.0) ||
         (sheet.proposed && sheet.proposed->settings.derivative_time > 0.0)))
        list.push_back("This controller's derivative acts on the error; the trends assume it on the process value, and miss the "
                       "kick of a set-point step.");
    if (found(sheet, FindingCode::output_clipped))
        list.push_back("Output or process value stood on a limit; those samples say less than they seem to.");
    if (sheet.speed && sheet.speed->time_constant < sheet.speed->effective_dead_time)
        list.push_back("Faster than the dead time supports; a small growth of the dead time makes the loop unstable (see the "
                       "delay margin).");
    if (!sheet.duty.scan_time)
        list.push_back("No scan time was given: margins hold for a continuous controller and are smaller in one that samples.");
    else if (sheet.proposed && sheet.proposed->settings.integral_time) {
        const double h = *sheet.duty.scan_time;
        if (h > sheet.fit.dead_time / 3.0 || h > *sheet.proposed->settings.integral_time / 10.0)
            list.push_back("The scan is slow for these settings (more than a third of the dead time or a tenth of the integral "
                           "time): the margins are those of the sampled loop, but a shorter scan would allow faster ones.");
    }
    for (const auto* controller : {&sheet.proposed, &sheet.as_found}) {
        if (!*controller || !(*controller)->valve_cycle || (*controller)->valve_cycle->existence == CycleExistence::none) continue;
        list.push_back("Valve, " + std::string(controller == &sheet.proposed ? "with the proposed settings: " : "as found: ") +
                       (*controller)->valve_cycle->reason + ".");
        break;
    }
    if (sheet.fit.form == Form::integrating_plus_dead_time)
        list.push_back("Integrating process: if this is a level, decide between tight and averaging control. Check that no "
                       "alarm, trip or pump protection lies inside the band it may move in.");
    if (!sheet.weak_margins_accepted_by.empty())
        list.push_back("Weak margins were accepted by " + sheet.weak_margins_accepted_by + ".");
}

}  // namespace

std::vector<std::string> cautions_for(const TuningSheet& sheet) {
    std::vector<std::string> list(std::begin(standing), std::end(standing));
    add_called_for(sheet, list);
    if (sheet.advice() == Advice::test_again) list.insert(list.end(), std::begin(before_testing), std::end(before_testing));
    if (sheet.proposed) {
        list.insert(list.end(), std::begin(before_typing), std::end(before_typing));
        list.insert(list.end(), std::begin(afterwards), std::end(afterwards));
    }
    return list;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
