// Closed-loop trends, their figures, and what a faulty valve does to a loop.
#include "bind.hpp"

namespace binding {

namespace {

using tw::Duty;
using tw::Figures;
using tw::Trend;
using tw::ValveCycle;

std::string text_of(const Duty& d) {
    Line line("Duty");
    line.unless(0.0, "setpoint_step", d.setpoint_step)
        .unless(0.0, "setpoint_ramp_time", d.setpoint_ramp_time, "s")
        .unless(0.0, "load_step", d.load_step)
        .unless(0.0, "load_time", d.load_time, "s")
        .unless(0.0, "load_ramp_time", d.load_ramp_time, "s");
    if (!d.disturbance.empty()) line.add("disturbance", std::to_string(d.disturbance.size()) + " scans");
    line.unless(0.0, "noise", d.noise)
        .add("scan_time", d.scan_time, "s")
        .add("output", tw::text_of(d.output_low) + " to " + tw::text_of(d.output_high))
        .add("output_rate_limit", d.output_rate_limit, "per s")
        .add("rest_output", d.rest_output)
        .add("rest_process_value", d.rest_process_value);
    if (!d.valve.perfect()) line.add("valve", binding::text_of(d.valve));
    if (!d.transmitter.perfect()) line.add("transmitter", binding::text_of(d.transmitter));
    return line.done();
}

void bind_duty(py::module_& m) {
    py::class_<Duty>(m, "Duty",
                     "What a loop must face, about an operating point; percent of span unless said otherwise. Immutable.\n\n"
                     "setpoint_step: at time 0, made over setpoint_ramp_time (s)\n"
                     "load_step: at the process input, from load_time (s) on, made over load_ramp_time (s)\n"
                     "disturbance: an array added at the process input, one value a scan from time 0 on, 0 after its end\n"
                     "noise: standard deviation of the measurement noise; seed: equal seeds give equal trends\n"
                     "scan_time: s                        output_low, output_high: limits of the output\n"
                     "output_rate_limit: fastest change of the output per s; None: no limit\n"
                     "valve: ValveSettings between output and process; transmitter: TransmitterSettings; None: perfect\n"
                     "rest_output, rest_process_value: where the process rests and the trend starts; None: the middle of\n"
                     "the limits, and 50 (tune takes them from the record)")
        .def(py::init([](double setpoint_step, double load_step, double load_time, double noise, std::uint64_t seed,
                         std::optional<double> scan_time, double output_low, double output_high,
                         std::optional<double> rest_output, std::optional<double> rest_process_value, double setpoint_ramp_time,
                         double load_ramp_time, std::optional<double> output_rate_limit, std::optional<tw::ValveSettings> valve,
                         std::optional<tw::TransmitterSettings> transmitter, const py::object& disturbance) {
                 Duty duty{.setpoint_step = setpoint_step,
                           .load_step = load_step,
                           .load_time = load_time,
                           .noise = noise,
                           .seed = seed,
                           .scan_time = scan_time,
                           .output_low = output_low,
                           .output_high = output_high,
                           .rest_output = rest_output,
                           .rest_process_value = rest_process_value,
                           .setpoint_ramp_time = setpoint_ramp_time,
                           .load_ramp_time = load_ramp_time,
                           .output_rate_limit = output_rate_limit,
                           .valve = valve.value_or(tw::ValveSettings{}),
                           .transmitter = transmitter.value_or(tw::TransmitterSettings{})};
                 if (!disturbance.is_none()) duty.disturbance = numbers_from("disturbance", disturbance);
                 tw::check(duty);
                 return duty;
             }),
             "setpoint_step"_a = 0.0, py::kw_only(), "load_step"_a = 0.0, "load_time"_a = 0.0, "noise"_a = 0.0, "seed"_a = 1,
             "scan_time"_a = py::none(), "output_low"_a = 0.0, "output_high"_a = 100.0, "rest_output"_a = py::none(),
             "rest_process_value"_a = py::none(), "setpoint_ramp_time"_a = 0.0, "load_ramp_time"_a = 0.0,
             "output_rate_limit"_a = py::none(), "valve"_a = py::none(), "transmitter"_a = py::none(),
             "disturbance"_a = py::none())
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
        .def_readonly("setpoint_ramp_time", &Duty::setpoint_ramp_time, "s; 0 is at once")
        .def_readonly("load_ramp_time", &Duty::load_ramp_time, "s; 0 is at once")
        .def_readonly("output_rate_limit", &Duty::output_rate_limit, "per s, or None")
        .def_readonly("valve", &Duty::valve, "ValveSettings; a perfect one where none was given")
        .def_readonly("transmitter", &Duty::transmitter, "TransmitterSettings; a perfect one where none was given")
        .def_property_readonly("disturbance", [](const Duty& d) { return array_from(d.disturbance); }, "empty for none")
        .def("__eq__", [](const Duty& a, const Duty& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Duty& d) { return text_of(d); });
}

void column(py::class_<Trend>& c, const char* name, std::vector<double> Trend::*member, const char* doc = "") {
    c.def_property_readonly(name, [member](const Trend& t) { return array_from(t.*member); }, doc);
}

void bind_trend(py::module_& m) {
    py::class_<Trend> c(m, "Trend", "A closed-loop trend, all columns of one length; one value a scan where it is sampled.");
    column(c, "time_s", &Trend::time_s);
    column(c, "setpoint", &Trend::setpoint);
    column(c, "process_value", &Trend::process_value, "the process's own; the controller sees measured");
    column(c, "output", &Trend::output, "of the controller");
    column(c, "measured", &Trend::measured, "what the controller sees: behind the transmitter, with noise");
    column(c, "valve_position", &Trend::valve_position, "what the valve makes of the output; the process gets it plus load");
    column(c, "load", &Trend::load, "at the process input, disturbance included");
    c.def_readonly("duty", &Trend::duty)
        .def_readonly("limited", &Trend::limited,
                      "the output stood on a limit at least once; in a continuous trend: it would have left them")
        .def_readonly("ran_away", &Trend::ran_away, "an unstable process left its rest beyond measure; the trend ends before that")
        .def("plot",
             [](const py::object& trend, const py::object& as_found, const std::pair<std::string, std::string>& labels) {
                 return py::module_::import("tauwright.plot").attr("trend_figure")(trend, "as_found"_a = as_found, "labels"_a = labels);
             },
             py::kw_only(), "as_found"_a = py::none(), "labels"_a = std::pair<std::string, std::string>("as found", "proposed"),
             "A Matplotlib Figure of set point, process value, output and valve; as_found: a Trend drawn beneath;\n"
             "labels: what the two are called, the one beneath first.")
        .def("__len__", &Trend::size)
        .def("__repr__", [](const Trend& t) {
            const double span = t.size() > 0 ? t.time_s.back() - t.time_s.front() : 0.0;
            return "Trend(" + std::to_string(t.size()) + " values over " + short_text(span) + " s" +
                   (t.limited ? ", output limited" : "") + (t.ran_away ? ", ran away)" : ")");
        });
    m.def("simulate",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, const Duty& duty, double horizon) {
              return tw::simulate(G, settings, duty, horizon);
          },
          "G"_a, "settings"_a, "duty"_a, py::kw_only(), "horizon"_a, py::call_guard<py::gil_scoped_release>(),
          "Runs the sampled controller against the exact process for horizon seconds; the duty needs a scan_time.\n"
          "Any proper process of order up to 20, any dead time.");
    m.def("continuous_trend",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, const Duty& duty, double horizon, std::size_t points) {
              return tw::continuous_trend(G, settings, duty, horizon, points);
          },
          "G"_a, "settings"_a, "duty"_a, py::kw_only(), "horizon"_a, "points"_a = 601, py::call_guard<py::gil_scoped_release>(),
          "The response of the continuous controller to the steps or ramps of the duty, to 1e-12: no scan, no limits.\n"
          "points: evenly spaced from 0 to horizon (s); at a jump the value after it");
}

void bind_figures(py::module_& m) {
    py::class_<Figures>(m, "Figures", "Figures of a trend. Times count from the step, those of a load from the time it enters.")
        .def_readonly("overshoot_percent", &Figures::overshoot_percent, "of the set-point step; None without one")
        .def_readonly("rise_time", &Figures::rise_time, "s from 10 to 90 % of the set-point step; None where it does not get there")
        .def_readonly("settling_time", &Figures::settling_time,
                      "s until it stays within 2 % of the set-point step; None where it does not within the horizon")
        .def_readonly("decay_ratio", &Figures::decay_ratio,
                      "second peak beyond the set point over the first (of a load alone: of the error); None without two")
        .def_readonly("peak_load_error", &Figures::peak_load_error, "largest |error| after the load step; None without one")
        .def_readonly("peak_load_error_time", &Figures::peak_load_error_time, "s from the load to that peak; None without one")
        .def_readonly("integrated_absolute_error", &Figures::integrated_absolute_error, "IAE, process value times s")
        .def_readonly("integrated_squared_error", &Figures::integrated_squared_error, "ISE")
        .def_readonly("integrated_time_absolute_error", &Figures::integrated_time_absolute_error,
                      "ITAE; time from the set-point step, without one from the load")
        .def_readonly("integrated_error", &Figures::integrated_error, "IE, set point less process value")
        .def_readonly("valve_travel", &Figures::valve_travel,
                      "sum of |valve position changes| (without a valve: of the output), from the rest output on")
        .def_readonly("reversals", &Figures::reversals, "turns of the valve (or output) by more than a millionth of the output's range")
        .def_readonly("time_at_limits", &Figures::time_at_limits, "s the output stands on its low or high limit")
        .def("__eq__", [](const Figures& a, const Figures& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Figures& f) {
            return Line("Figures")
                .add("overshoot", optional_text(f.overshoot_percent), "%")
                .add("rise_time", optional_text(f.rise_time), "s")
                .add("settling_time", optional_text(f.settling_time), "s")
                .add("decay_ratio", optional_text(f.decay_ratio))
                .add("peak_load_error", optional_text(f.peak_load_error))
                .add("peak_load_error_time", optional_text(f.peak_load_error_time), "s")
                .add("integrated_absolute_error", short_text(f.integrated_absolute_error))
                .add("valve_travel", short_text(f.valve_travel))
                .add("reversals", std::to_string(f.reversals))
                .add("time_at_limits", short_text(f.time_at_limits), "s")
                .done();
        });
    m.def("figures", &tw::figures, "trend"_a, py::call_guard<py::gil_scoped_release>(), "Figures of a trend.");
}

void bind_valve_cycle(py::module_& m) {
    py::class_<ValveCycle>(m, "ValveCycle",
                           "What a faulty valve does to a loop left alone under a constant load. Amplitudes are half of peak to peak.")
        .def_property_readonly("existence", [](const ValveCycle& c) { return tw::name_of(c.existence); },
                               "'none', 'persists' or 'undetermined'")
        .def_readonly("period", &ValveCycle::period, "s; None where there is no cycle or its size is not known")
        .def_readonly("process_value_amplitude", &ValveCycle::process_value_amplitude)
        .def_readonly("output_amplitude", &ValveCycle::output_amplitude)
        .def_readonly("reason", &ValveCycle::reason, "one plain line")
        .def_readonly("retuning_cures", &ValveCycle::retuning_cures, "other settings end the cycle; False where there is none")
        .def("__eq__", [](const ValveCycle& a, const ValveCycle& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const ValveCycle& c) {
            Line line("ValveCycle");
            line.add("existence", tw::name_of(c.existence));
            if (c.period) line.add("period", short_text(*c.period), "s");
            if (c.process_value_amplitude) line.add("process_value_amplitude", short_text(*c.process_value_amplitude));
            if (c.output_amplitude) line.add("output_amplitude", short_text(*c.output_amplitude));
            line.add("retuning_cures", c.retuning_cures ? "True" : "False").add("reason", "'" + c.reason + "'");
            return shown(line.done());
        });
    m.def("valve_cycle", &tw::valve_cycle, "G"_a, "settings"_a, "valve"_a, py::call_guard<py::gil_scoped_release>(),
          "Whether the loop cycles because of its valve, and how: exact for sticking and resolution, by the balance of\n"
          "harmonics for a dead band.");
}

}  // namespace

void bind_trends(py::module_& m) {
    bind_duty(m);
    bind_trend(m);
    bind_many_trends(m);
    bind_figures(m);
    bind_valve_cycle(m);
}

}  // namespace binding
