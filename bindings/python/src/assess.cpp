#include <variant>

#include "bind.hpp"

namespace binding {

namespace {

using tw::DelayBudget;
using tw::Robustness;
using AnyController = std::variant<tw::PidSettings, tw::InternalModelController>;

// What it is the robustness of, so that it can be drawn.
struct LoopRobustness : Robustness {
    tw::TransferFunction process;
    std::optional<AnyController> settings;
    std::optional<double> scan_time;
    double extra_delay = 0.0;
};

LoopRobustness robustness_of(const tw::TransferFunction& process, const std::optional<AnyController>& settings,
                         std::optional<double> scan_time, double extra_delay) {
    if (!settings && (scan_time || extra_delay != 0.0))
        throw tw::Error(tw::error_code::conflicting_arguments,
                        std::string(scan_time ? "scan_time" : "extra_delay") +
                            " is given without settings; an open loop is taken as it is: put the dead time into it");
    const py::gil_scoped_release released;
    const tw::RobustnessOptions options{.scan_time = scan_time, .extra_delay = extra_delay};
    const auto with = [&](const auto& controller) { return tw::robustness(process, controller, options); };
    return {settings ? std::visit(with, *settings) : tw::robustness(process), process, settings, scan_time, extra_delay};
}

std::string text_of(const Robustness& r) {
    Line line("Robustness");
    line.add("verdict", tw::name_of(r.verdict))
        .add("gain_margin", optional_text(r.gain_margin))
        .add("phase_margin", optional_text(r.phase_margin_deg), "deg")
        .add("delay_margin", optional_text(r.delay_margin), "s")
        .add("max_sensitivity", optional_text(r.max_sensitivity))
        .add("max_complementary_sensitivity", optional_text(r.max_complementary_sensitivity));
    if (r.fragile) line.add("fragile", "True");
    return line.done();
}

template <class Crossover>
void add_touch(py::class_<Crossover>& c, const char* touches) {
    c.def_readonly("touches", &Crossover::touches, touches)
        .def_readonly("error_bound", &Crossover::error_bound, "rad/s, of a touch: between two crossings and none lies this much");
}

template <class Crossover>
std::string done(Line& line, const Crossover& c) {
    if (c.touches) line.add("touches", "True").add("error_bound", short_text(c.error_bound), "rad/s");
    return line.done();
}

void bind_crossovers(py::module_& m) {
    py::class_<tw::GainCrossover> gain(m, "GainCrossover", "A frequency at which the open loop has gain 1.");
    gain.def_readonly("frequency_rad_s", &tw::GainCrossover::frequency_rad_s)
        .def_readonly("phase_margin_deg", &tw::GainCrossover::phase_margin_deg, "angle from -1, whichever direction")
        .def_readonly("delay_margin", &tw::GainCrossover::delay_margin, "s, dead time that would bring the loop through -1 here")
        .def("__repr__", [](const tw::GainCrossover& c) {
            Line line("GainCrossover");
            line.add("frequency", short_text(c.frequency_rad_s), "rad/s")
                .add("phase_margin", short_text(c.phase_margin_deg), "deg").add("delay_margin", short_text(c.delay_margin), "s");
            return done(line, c);
        });
    add_touch(gain, "the gain reaches 1 without passing it, as far as rounding tells");
    py::class_<tw::PhaseCrossover> phase(m, "PhaseCrossover", "A frequency at which the open loop is real and negative.");
    phase.def_readonly("frequency_rad_s", &tw::PhaseCrossover::frequency_rad_s)
        .def_readonly("gain_factor", &tw::PhaseCrossover::gain_factor,
                      "factor on the gain that would bring the loop through -1 here")
        .def("__repr__", [](const tw::PhaseCrossover& c) {
            Line line("PhaseCrossover");
            line.add("frequency", short_text(c.frequency_rad_s), "rad/s").add("gain_factor", short_text(c.gain_factor));
            return done(line, c);
        });
    add_touch(phase, "the loop reaches the negative real axis without passing it");
}

py::list ranges_of(const std::vector<tw::DelayRange>& ranges) {
    py::list list;
    for (const auto& range : ranges) list.append(py::make_tuple(range.low, range.high));
    return list;
}

void bind_robustness(py::module_& m) {
    py::class_<Robustness>(m, "Robustness",
                           "What the open loop says of the closed loop. Infinite (gain_reduction_margin: 0) where nothing\n"
                           "destabilizes; margins and peaks are None where the loop is not stable.")
        .def_property_readonly("verdict", [](const Robustness& r) { return tw::name_of(r.verdict); },
                               "'stable', 'unstable', 'marginal' or 'undetermined'")
        .def_readonly("stable", &Robustness::stable, "None where undetermined")
        .def_readonly("unstable_poles", &Robustness::unstable_poles,
                      "of the closed loop (sampled: outside the unit circle); None where undetermined")
        .def_readonly("gain_margin", &Robustness::gain_margin, "smallest factor above 1 that destabilizes")
        .def_readonly("gain_reduction_margin", &Robustness::gain_reduction_margin, "largest factor below 1 that destabilizes")
        .def_readonly("phase_margin_deg", &Robustness::phase_margin_deg, "smallest angle from -1 over all gain crossovers")
        .def_readonly("delay_margin", &Robustness::delay_margin, "s, smallest dead time that destabilizes")
        .def_readonly("delay_reduction_margin", &Robustness::delay_reduction_margin,
                      "s, smallest reduction of the dead time that destabilizes; infinite for none")
        .def_property_readonly("stable_dead_times", [](const Robustness& r) { return ranges_of(r.stable_dead_times); },
                               "(low, high) in s each, ascending: all dead times of the process with which this controller is\n"
                               "stable; high may be infinite. Empty for sampled loops")
        .def_readonly("fragile", &Robustness::fragile, "an arbitrarily small error of the dead time can destabilize")
        .def_readonly("max_sensitivity", &Robustness::max_sensitivity, "Ms, the largest |1/(1 + L)|")
        .def_readonly("max_sensitivity_frequency", &Robustness::max_sensitivity_frequency, "rad/s; infinite where only a limit")
        .def_readonly("sensitivity_bandwidth", &Robustness::sensitivity_bandwidth,
                      "rad/s, lowest frequency at which |1/(1 + L)| rises through 1/sqrt(2); None for none")
        .def_readonly("max_complementary_sensitivity", &Robustness::max_complementary_sensitivity, "Mt, the largest |L/(1 + L)|")
        .def_readonly("max_complementary_sensitivity_frequency", &Robustness::max_complementary_sensitivity_frequency,
                      "rad/s; 0 where at rest")
        .def_readonly("complementary_bandwidth", &Robustness::complementary_bandwidth,
                      "rad/s, highest frequency at which |L/(1 + L)| falls through 1/sqrt(2); None for none")
        .def_property_readonly("gain_crossovers", [](const Robustness& r) { return py::tuple(py::cast(r.gain_crossovers)); })
        .def_property_readonly("phase_crossovers", [](const Robustness& r) { return py::tuple(py::cast(r.phase_crossovers)); },
                               "as far as they matter: at most 1000")
        .def_readonly("phase_crossovers_capped", &Robustness::phase_crossovers_capped, "there are more")
        .def("__eq__", [](const Robustness& a, const Robustness& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Robustness& r) { return text_of(r); });
    const auto drawn = [](const char* function) {
        return [function](const py::object& margins) { return py::module_::import("tauwright.plot").attr(function)(margins); };
    };
    py::class_<LoopRobustness, Robustness>(m, "LoopRobustness", "What robustness returns: margins that know their loop and can draw it.")
        .def_readonly("process", &LoopRobustness::process)
        .def_readonly("settings", &LoopRobustness::settings, "PidSettings or InternalModelController; None of an open loop")
        .def_readonly("scan_time", &LoopRobustness::scan_time, "s, or None")
        .def_readonly("extra_delay", &LoopRobustness::extra_delay, "s")
        .def("plot", drawn("open_loop_figure"),
             "A Matplotlib Figure of the open loop on the complex plane with its closest approach to -1.")
        .def("plot_sensitivity", drawn("sensitivity_figure"),
             "A Matplotlib Figure of |S| and |T| over frequency with peaks and bandwidths.");
    m.def("robustness", &robustness_of, "process"_a, "settings"_a = py::none(), py::kw_only(), "scan_time"_a = py::none(),
          "extra_delay"_a = 0.0,
          "Margins, sensitivity peaks and a stability verdict with exact dead time.\n\n"
          "robustness(L): of an open loop; robustness(G, settings): of process and settings, every filter included;\n"
          "robustness(G, controller): under the exact controller that synthesize gave, of the same or another process\n"
          "scan_time: the loop as it runs, the block once a scan and its output held; extra_delay: dead time added; both in s");
}

void bind_delay_budget(py::module_& m) {
    py::class_<DelayBudget>(m, "DelayBudget",
                            "What takes part in the dead time that the loop feels, s, and in its working gain: the usual first-order\n"
                            "estimates of what robustness with the scan time has exactly.")
        .def_readonly("process_dead_time", &DelayBudget::process_dead_time)
        .def_readonly("half_scan", &DelayBudget::half_scan, "sampling and hold")
        .def_readonly("extra_delay", &DelayBudget::extra_delay, "computation, transport")
        .def_readonly("measurement_filter_time", &DelayBudget::measurement_filter_time)
        .def_property_readonly("total", &DelayBudget::total, "s, the sum of these")
        .def_readonly("working_gain", &DelayBudget::working_gain,
                      "backward integration raises the gain by scan_time / (2 integral_time)")
        .def("__eq__", [](const DelayBudget& a, const DelayBudget& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const DelayBudget& b) {
            return Line("DelayBudget")
                .add("process_dead_time", short_text(b.process_dead_time), "s")
                .add("half_scan", short_text(b.half_scan), "s")
                .add("extra_delay", short_text(b.extra_delay), "s")
                .add("measurement_filter_time", short_text(b.measurement_filter_time), "s")
                .add("total", short_text(b.total()), "s")
                .add("working_gain", short_text(b.working_gain))
                .done();
        });
    m.def("delay_budget",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, std::optional<double> scan_time, double extra_delay) {
              return tw::delay_budget(G, settings, {.scan_time = scan_time, .extra_delay = extra_delay});
          },
          "G"_a, "settings"_a, py::kw_only(), "scan_time"_a = py::none(), "extra_delay"_a = 0.0,
          "Where the loop's effective dead time comes from, all in s.");
}

}  // namespace

void bind_assess(py::module_& m) {
    bind_crossovers(m);
    bind_robustness(m);
    bind_delay_budget(m);
}

}  // namespace binding
