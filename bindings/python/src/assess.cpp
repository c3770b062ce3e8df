#include "bind.hpp"

namespace binding {

namespace {

using tw::Duty;
using tw::Figures;
using tw::Robustness;
using tw::Trend;

Robustness robustness_of(const tw::TransferFunction& process, const tw::PidSettings* settings, std::optional<double> scan_time,
                         double extra_delay) {
    if (settings == nullptr && (scan_time || extra_delay != 0.0))
        throw tw::Error(tw::error_code::conflicting_arguments,
                        std::string(scan_time ? "scan_time" : "extra_delay") +
                            " is given without settings; an open loop is taken as it is: put the dead time into it");
    const py::gil_scoped_release released;
    if (settings == nullptr) return tw::robustness(process);
    return tw::robustness(process, *settings, {.scan_time = scan_time, .extra_delay = extra_delay});
}

std::string optional_text(const std::optional<double>& x) { return x ? short_text(*x) : "None"; }

std::string text_of(const Robustness& r) {
    return Line("Robustness")
        .add("verdict", tw::name_of(r.verdict))
        .add("gain_margin", optional_text(r.gain_margin))
        .add("phase_margin", optional_text(r.phase_margin_deg), "deg")
        .add("delay_margin", optional_text(r.delay_margin), "s")
        .add("max_sensitivity", optional_text(r.max_sensitivity))
        .add("max_complementary_sensitivity", optional_text(r.max_complementary_sensitivity))
        .done();
}

void bind_robustness(py::module_& m) {
    py::class_<tw::GainCrossover>(m, "GainCrossover", "A frequency at which the open loop has gain 1.")
        .def_readonly("frequency_rad_s", &tw::GainCrossover::frequency_rad_s)
        .def_readonly("phase_margin_deg", &tw::GainCrossover::phase_margin_deg, "angle from -1, whichever direction")
        .def_readonly("delay_margin", &tw::GainCrossover::delay_margin,
                      "s, dead time that would bring the loop through -1 here")
        .def("__repr__", [](const tw::GainCrossover& c) {
            return Line("GainCrossover").add("frequency", short_text(c.frequency_rad_s), "rad/s")
                .add("phase_margin", short_text(c.phase_margin_deg), "deg").add("delay_margin", short_text(c.delay_margin), "s").done();
        });
    py::class_<tw::PhaseCrossover>(m, "PhaseCrossover", "A frequency at which the open loop is real and negative.")
        .def_readonly("frequency_rad_s", &tw::PhaseCrossover::frequency_rad_s)
        .def_readonly("gain_factor", &tw::PhaseCrossover::gain_factor,
                      "factor on the gain that would bring the loop through -1 here")
        .def("__repr__", [](const tw::PhaseCrossover& c) {
            return Line("PhaseCrossover").add("frequency", short_text(c.frequency_rad_s), "rad/s")
                .add("gain_factor", short_text(c.gain_factor)).done();
        });
    py::class_<Robustness>(m, "Robustness",
                           "What the open loop says of the closed loop. Infinite (gain_reduction_margin: 0) where nothing\n"
                           "destabilizes; margins and peaks are None where the loop is not stable.")
        .def_property_readonly("verdict", [](const Robustness& r) { return tw::name_of(r.verdict); },
                               "'stable', 'unstable', 'marginal' or 'undetermined'")
        .def_readonly("stable", &Robustness::stable, "None where undetermined")
        .def_readonly("unstable_poles", &Robustness::unstable_poles, "of the closed loop; None where undetermined")
        .def_readonly("gain_margin", &Robustness::gain_margin, "smallest factor above 1 that destabilizes")
        .def_readonly("gain_reduction_margin", &Robustness::gain_reduction_margin, "largest factor below 1 that destabilizes")
        .def_readonly("phase_margin_deg", &Robustness::phase_margin_deg, "smallest angle from -1 over all gain crossovers")
        .def_readonly("delay_margin", &Robustness::delay_margin, "s, smallest dead time that destabilizes")
        .def_readonly("max_sensitivity", &Robustness::max_sensitivity, "Ms, the largest |1/(1 + L)|")
        .def_readonly("max_sensitivity_frequency", &Robustness::max_sensitivity_frequency, "rad/s")
        .def_readonly("max_complementary_sensitivity", &Robustness::max_complementary_sensitivity, "Mt, the largest |L/(1 + L)|")
        .def_readonly("max_complementary_sensitivity_frequency", &Robustness::max_complementary_sensitivity_frequency, "rad/s")
        .def_property_readonly("gain_crossovers", [](const Robustness& r) { return py::tuple(py::cast(r.gain_crossovers)); })
        .def_property_readonly("phase_crossovers", [](const Robustness& r) { return py::tuple(py::cast(r.phase_crossovers)); })
        .def("__eq__", [](const Robustness& a, const Robustness& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Robustness& r) { return text_of(r); });
    m.def("robustness", &robustness_of, "process"_a, "settings"_a = py::none(), py::kw_only(), "scan_time"_a = py::none(),
          "extra_delay"_a = 0.0,
          "Margins, sensitivity peaks and a stability verdict with exact dead time.\n\n"
          "robustness(L): of an open loop; robustness(G, settings): of process and settings, every filter included.\n"
          "scan_time: half of it stands in for sampling; extra_delay: dead time added; both in seconds");
}

std::string text_of(const Duty& d) {
    return Line("Duty")
        .unless(0.0, "setpoint_step", d.setpoint_step)
        .unless(0.0, "load_step", d.load_step)
        .unless(0.0, "load_time", d.load_time, "s")
        .unless(0.0, "noise", d.noise)
        .add("scan_time", d.scan_time, "s")
        .add("output", tw::text_of(d.output_low) + " to " + tw::text_of(d.output_high))
        .add("rest_output", d.rest_output)
        .add("rest_process_value", d.rest_process_value)
        .done();
}

void bind_simulation(py::module_& m) {
    py::class_<Duty>(m, "Duty",
                     "What a loop must face, about an operating point; percent of span unless said otherwise. Immutable.\n\n"
                     "setpoint_step: at time 0            load_step: at the process input, from load_time (s) on\n"
                     "noise: standard deviation of the measurement noise; seed: equal seeds give equal trends\n"
                     "scan_time: s                        output_low, output_high: limits of the output\n"
                     "rest_output, rest_process_value: where the process rests and the trend starts; None: the middle of\n"
                     "the limits, and 50 (tune takes them from the record)")
        .def(py::init([](double setpoint_step, double load_step, double load_time, double noise, std::uint64_t seed,
                         std::optional<double> scan_time, double output_low, double output_high,
                         std::optional<double> rest_output, std::optional<double> rest_process_value) {
                 const Duty duty{.setpoint_step = setpoint_step,
                                 .load_step = load_step,
                                 .load_time = load_time,
                                 .noise = noise,
                                 .seed = seed,
                                 .scan_time = scan_time,
                                 .output_low = output_low,
                                 .output_high = output_high,
                                 .rest_output = rest_output,
                                 .rest_process_value = rest_process_value};
                 tw::check(duty);
                 return duty;
             }),
             "setpoint_step"_a = 0.0, py::kw_only(), "load_step"_a = 0.0, "load_time"_a = 0.0, "noise"_a = 0.0, "seed"_a = 1,
             "scan_time"_a = py::none(), "output_low"_a = 0.0, "output_high"_a = 100.0, "rest_output"_a = py::none(),
             "rest_process_value"_a = py::none())
        .def_readonly("setpoint_step", &Duty::setpoint_step)
        .def_readonly("load_step", &Duty::load_step)
        .def_readonly("load_time", &Duty::load_time, "s")
        .def_readonly("noise", &Duty::noise)
        .def_readonly("seed", &Duty::seed)
        .def_readonly("scan_time", &Duty::scan_time, "s")
        .def_readonly("output_low", &Duty::output_low)
        .def_readonly("output_high", &Duty::output_high)
        .def_readonly("rest_output", &Duty::rest_output)
        .def_readonly("rest_process_value", &Duty::rest_process_value)
        .def("__eq__", [](const Duty& a, const Duty& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Duty& d) { return text_of(d); });

    py::class_<Trend>(m, "Trend", "A closed-loop trend, one value a scan.")
        .def_property_readonly("time_s", [](const Trend& t) { return array_from(t.time_s); })
        .def_property_readonly("setpoint", [](const Trend& t) { return array_from(t.setpoint); })
        .def_property_readonly("process_value", [](const Trend& t) { return array_from(t.process_value); },
                               "the process's own; the controller sees it with the duty's noise")
        .def_property_readonly("output", [](const Trend& t) { return array_from(t.output); })
        .def_readonly("duty", &Trend::duty)
        .def_readonly("limited", &Trend::limited, "the output stood on a limit at least once")
        .def("__len__", &Trend::size)
        .def("__repr__", [](const Trend& t) {
            return "Trend(" + std::to_string(t.size()) + " scans over " + short_text(t.time_s.back() - t.time_s.front()) + " s" +
                   (t.limited ? ", output limited)" : ")");
        });
    m.def("simulate",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, const Duty& duty, double horizon) {
              return tw::simulate(G, settings, duty, horizon);
          },
          "G"_a, "settings"_a, "duty"_a, py::kw_only(), "horizon"_a, py::call_guard<py::gil_scoped_release>(),
          "Runs the sampled controller against the exact process for horizon seconds; the duty needs a scan_time.");

    py::class_<Figures>(m, "Figures", "Figures of a trend. Times count from the step.")
        .def_readonly("overshoot_percent", &Figures::overshoot_percent, "of the set-point step; None without one")
        .def_readonly("settling_time", &Figures::settling_time,
                      "s until it stays within 2 % of the set-point step; None where it does not within the horizon")
        .def_readonly("peak_load_error", &Figures::peak_load_error, "largest |error| after the load step; None without one")
        .def_readonly("integrated_absolute_error", &Figures::integrated_absolute_error, "process value times s")
        .def_readonly("valve_travel", &Figures::valve_travel, "sum of |output changes|, from the rest output on")
        .def("__eq__", [](const Figures& a, const Figures& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Figures& f) {
            return Line("Figures")
                .add("overshoot", optional_text(f.overshoot_percent), "%")
                .add("settling_time", optional_text(f.settling_time), "s")
                .add("peak_load_error", optional_text(f.peak_load_error))
                .add("integrated_absolute_error", short_text(f.integrated_absolute_error))
                .add("valve_travel", short_text(f.valve_travel))
                .done();
        });
    m.def("figures", &tw::figures, "trend"_a, py::call_guard<py::gil_scoped_release>(), "Figures of a trend.");
}

}  // namespace

void bind_assess(py::module_& m) {
    bind_robustness(m);
    bind_simulation(m);
}

}  // namespace binding
