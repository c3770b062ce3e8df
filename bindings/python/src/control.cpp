#include "bind.hpp"

namespace binding {

namespace {

using tw::ControllerForm;
using tw::Entered;
using tw::PidSettings;

std::string text_of(const PidSettings& s) {
    Line line("PidSettings");
    line.add("gain", s.gain);
    if (s.gain == 0.0) line.add("integral_gain", s.integral_gain_per_s(), "1/s");
    return line.add("integral_time", s.integral_time, "s")
        .unless(0.0, "derivative_time", s.derivative_time, "s")
        .unless(0.0, "filter_time", s.filter_time, "s")
        .unless(0.0, "measurement_filter_time", s.measurement_filter_time, "s")
        .unless(1.0, "setpoint_weight", s.setpoint_weight)
        .done();
}

PidSettings settings_of(double gain, std::optional<double> integral_time, double derivative_time, double filter_time,
                        double measurement_filter_time, double setpoint_weight, std::optional<double> integral_gain) {
    PidSettings s{.gain = gain,
                  .integral_time = integral_time,
                  .derivative_time = derivative_time,
                  .filter_time = filter_time,
                  .measurement_filter_time = measurement_filter_time,
                  .setpoint_weight = setpoint_weight,
                  .integral_gain = integral_gain};
    tw::require(s);
    // Beside an integral time it is redundant; equal settings shall compare equal.
    if (s.integral_time) s.integral_gain.reset();
    return s;
}

void bind_settings(py::module_& m) {
    py::class_<PidSettings>(m, "PidSettings",
                            "C(s) = gain (1 + 1/(integral_time s) + derivative_time s/(filter_time s + 1)) /\n"
                            "(measurement_filter_time s + 1). Times in seconds; positive gain is reverse acting; bare gains are\n"
                            "percent of span per percent of span. Legal: P, PI, PID, PD, and I alone by integral_gain. Immutable.")
        .def(py::init(&settings_of), "gain"_a = 0.0, py::kw_only(), "integral_time"_a = py::none(), "derivative_time"_a = 0.0,
             "filter_time"_a = 0.0, "measurement_filter_time"_a = 0.0, "setpoint_weight"_a = 1.0,
             "integral_gain"_a = py::none())
        .def_readonly("gain", &PidSettings::gain)
        .def_readonly("integral_time", &PidSettings::integral_time, "s, or None without integral action")
        .def_readonly("derivative_time", &PidSettings::derivative_time, "s")
        .def_readonly("filter_time", &PidSettings::filter_time, "s, on the derivative alone")
        .def_readonly("measurement_filter_time", &PidSettings::measurement_filter_time, "s, on the process value")
        .def_readonly("setpoint_weight", &PidSettings::setpoint_weight, "share of the set point that proportional action sees")
        .def_property_readonly("integral_gain", &PidSettings::integral_gain_per_s,
                               "gain / integral_time in 1/s; 0 without integral action")
        .def("__call__", [](const PidSettings& c, const py::object& s) { return evaluated(c, s); }, "s"_a,
             "Response to the error at a complex s in rad/s: a complex number, or an array of the shape of s.")
        .def("__eq__", [](const PidSettings& a, const PidSettings& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const PidSettings& s) { return text_of(s); });
    m.def("transfer_function", [](const PidSettings& s) { return tw::transfer_function(s); }, "settings"_a,
          "C(s) of the settings in factors, both filters included.");
}

double limit_from(const char* name, const char* end, py::handle value) {
    const double number = PyFloat_AsDouble(value.ptr());
    if (PyErr_Occurred()) {
        PyErr_Clear();
        throw tw::Error(tw::error_code::out_of_domain, std::string(name) + "." + end + " is " +
                                                           std::string(py::repr(value)) + "; give a number, or None for no limit");
    }
    return number;
}

tw::FieldLimits limits_from(const char* name, const py::object& value) {
    tw::FieldLimits limits;
    if (value.is_none()) return limits;
    if ((!py::isinstance<py::tuple>(value) && !py::isinstance<py::list>(value)) || py::len(value) != 2)
        throw tw::Error(tw::error_code::wrong_length, std::string(name) + " is " + std::string(py::repr(value)) +
                                                          "; give (low, high), None for no limit on a side");
    const auto ends = py::cast<py::sequence>(value);
    if (!ends[0].is_none()) limits.low = limit_from(name, "low", ends[0]);
    if (!ends[1].is_none()) limits.high = limit_from(name, "high", ends[1]);
    return limits;
}

py::object limits_of(const tw::FieldLimits& limits) {
    if (!limits.low && !limits.high) return py::none();
    return py::make_tuple(limits.low, limits.high);
}

ControllerForm form_of(const std::string& equation, const std::string& gain_as, const std::string& gain_unit,
                       const std::string& integral_as, const std::string& integral_unit, const std::string& derivative_unit,
                       const std::string& filter_as, const std::string& proportional_on, const std::string& derivative_on,
                       const std::string& action_as, double integral_off, const py::object& process_value_range,
                       const py::object& output_range, const py::object& gain_limits, const py::object& integral_limits,
                       const py::object& derivative_limits, const py::object& filter_limits, double gain_resolution,
                       double integral_resolution, double derivative_resolution, double filter_resolution,
                       std::optional<double> fixed_filter) {
    ControllerForm form{.equation = value_of<tw::Equation>("equation", equation),
                        .gain_as = value_of<tw::GainAs>("gain_as", gain_as),
                        .gain_unit = value_of<tw::GainUnit>("gain_unit", gain_unit),
                        .integral_as = value_of<tw::IntegralAs>("integral_as", integral_as),
                        .integral_unit = value_of<tw::TimeUnit>("integral_unit", integral_unit),
                        .derivative_unit = value_of<tw::TimeUnit>("derivative_unit", derivative_unit),
                        .filter_as = value_of<tw::FilterAs>("filter_as", filter_as),
                        .proportional_on = value_of<tw::ActsOn>("proportional_on", proportional_on),
                        .derivative_on = value_of<tw::ActsOn>("derivative_on", derivative_on),
                        .action_as = value_of<tw::ActionAs>("action_as", action_as),
                        .integral_off = integral_off,
                        .process_value_range = range_from("process_value_range", process_value_range),
                        .output_range = range_from("output_range", output_range),
                        .gain_limits = limits_from("gain_limits", gain_limits),
                        .integral_limits = limits_from("integral_limits", integral_limits),
                        .derivative_limits = limits_from("derivative_limits", derivative_limits),
                        .filter_limits = limits_from("filter_limits", filter_limits),
                        .gain_resolution = gain_resolution,
                        .integral_resolution = integral_resolution,
                        .derivative_resolution = derivative_resolution,
                        .filter_resolution = filter_resolution,
                        .fixed_filter = fixed_filter};
    tw::check(form);
    return form;
}

std::string text_of(const ControllerForm& f) {
    Line line("ControllerForm");
    line.add("equation", tw::name_of(f.equation)).add("gain_as", tw::name_of(f.gain_as)).add("gain_unit", tw::name_of(f.gain_unit));
    line.add("integral_as", tw::name_of(f.integral_as)).add("integral_unit", tw::name_of(f.integral_unit));
    line.add("derivative_unit", tw::name_of(f.derivative_unit)).add("filter_as", tw::name_of(f.filter_as));
    line.add("proportional_on", tw::name_of(f.proportional_on)).add("derivative_on", tw::name_of(f.derivative_on));
    line.add("action_as", tw::name_of(f.action_as)).unless(0.0, "integral_off", f.integral_off);
    if (f.process_value_range) line.add("process_value_range", text_of_range(*f.process_value_range));
    if (f.output_range) line.add("output_range", text_of_range(*f.output_range));
    line.unless(0.0, "gain_resolution", f.gain_resolution).unless(0.0, "integral_resolution", f.integral_resolution);
    line.unless(0.0, "derivative_resolution", f.derivative_resolution).unless(0.0, "filter_resolution", f.filter_resolution);
    return line.add("fixed_filter", f.fixed_filter).done();
}

// Enumerations read as their words.
template <auto member>
const char* word(const ControllerForm& form) {
    return tw::name_of(form.*member);
}

void bind_form(py::module_& m) {
    using F = ControllerForm;
    py::class_<F>(m, "ControllerForm",
                  "What the controller at hand expects. Immutable.\n\n"
                  "equation: 'ideal', 'series', 'parallel'\n"
                  "gain_as: 'gain', 'proportional_band'       gain_unit: 'percent', 'engineering'\n"
                  "integral_as: 'time', 'repeats', 'gain'     integral_unit, derivative_unit: 'seconds', 'minutes'\n"
                  "filter_as: 'time' (in the derivative's unit), 'ratio' (derivative / filter)\n"
                  "proportional_on, derivative_on: 'error', 'process_value'\n"
                  "action_as: 'action_switch', 'sign'\n"
                  "integral_off: the integral number that means no integral action\n"
                  "..._range: Range, (low, high) or (low, high, unit); needed for engineering units\n"
                  "..._limits: (low, high) a field takes, None for no limit\n"
                  "..._resolution: smallest step of the display, 0 for no rounding\n"
                  "fixed_filter: the filter number built in, not to be entered")
        .def(py::init(&form_of), "equation"_a = "ideal", py::kw_only(), "gain_as"_a = "gain", "gain_unit"_a = "percent",
             "integral_as"_a = "time", "integral_unit"_a = "seconds", "derivative_unit"_a = "seconds", "filter_as"_a = "time",
             "proportional_on"_a = "error", "derivative_on"_a = "process_value", "action_as"_a = "action_switch",
             "integral_off"_a = 0.0, "process_value_range"_a = py::none(), "output_range"_a = py::none(),
             "gain_limits"_a = py::none(), "integral_limits"_a = py::none(), "derivative_limits"_a = py::none(),
             "filter_limits"_a = py::none(), "gain_resolution"_a = 0.0, "integral_resolution"_a = 0.0,
             "derivative_resolution"_a = 0.0, "filter_resolution"_a = 0.0, "fixed_filter"_a = py::none())
        .def_property_readonly("equation", &word<&F::equation>)
        .def_property_readonly("gain_as", &word<&F::gain_as>)
        .def_property_readonly("gain_unit", &word<&F::gain_unit>)
        .def_property_readonly("integral_as", &word<&F::integral_as>)
        .def_property_readonly("integral_unit", &word<&F::integral_unit>)
        .def_property_readonly("derivative_unit", &word<&F::derivative_unit>)
        .def_property_readonly("filter_as", &word<&F::filter_as>)
        .def_property_readonly("proportional_on", &word<&F::proportional_on>)
        .def_property_readonly("derivative_on", &word<&F::derivative_on>)
        .def_property_readonly("action_as", &word<&F::action_as>)
        .def_readonly("integral_off", &F::integral_off)
        .def_readonly("process_value_range", &F::process_value_range)
        .def_readonly("output_range", &F::output_range)
        .def_property_readonly("gain_limits", [](const F& f) { return limits_of(f.gain_limits); })
        .def_property_readonly("integral_limits", [](const F& f) { return limits_of(f.integral_limits); })
        .def_property_readonly("derivative_limits", [](const F& f) { return limits_of(f.derivative_limits); })
        .def_property_readonly("filter_limits", [](const F& f) { return limits_of(f.filter_limits); })
        .def_readonly("gain_resolution", &F::gain_resolution)
        .def_readonly("integral_resolution", &F::integral_resolution)
        .def_readonly("derivative_resolution", &F::derivative_resolution)
        .def_readonly("filter_resolution", &F::filter_resolution)
        .def_readonly("fixed_filter", &F::fixed_filter)
        .def("__eq__", [](const F& a, const F& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const F& f) { return shown(text_of(f)); });
}

std::string text_of(const Entered& e) {
    return Line("Entered")
        .add("gain", e.gain)
        .add("proportional_band", e.proportional_band, "%")
        .add("integral_time", e.integral_time)
        .add("repeats", e.repeats)
        .add("integral_gain", e.integral_gain)
        .add("derivative_time", e.derivative_time)
        .add("derivative_gain", e.derivative_gain)
        .add("filter_time", e.filter_time)
        .add("filter_ratio", e.filter_ratio)
        .unless(0.0, "measurement_filter_time", e.measurement_filter_time, "s")
        .unless(1.0, "setpoint_weight", e.setpoint_weight)
        .add("action", tw::name_of(e.action))
        .done();
}

void bind_entered(py::module_& m) {
    using Number = std::optional<double>;
    py::class_<Entered>(m, "Entered",
                        "The very numbers to key in, in the units of a ControllerForm; which are set follows from the form.\n"
                        "measurement_filter_time is in seconds; action is 'reverse' or 'direct'. Immutable.")
        .def(py::init([](Number gain, Number proportional_band, Number integral_time, Number repeats, Number integral_gain,
                         Number derivative_time, Number derivative_gain, Number filter_time, Number filter_ratio,
                         double measurement_filter_time, double setpoint_weight, const std::string& action) {
                 return Entered{.gain = gain,
                                .proportional_band = proportional_band,
                                .integral_time = integral_time,
                                .repeats = repeats,
                                .integral_gain = integral_gain,
                                .derivative_time = derivative_time,
                                .derivative_gain = derivative_gain,
                                .filter_time = filter_time,
                                .filter_ratio = filter_ratio,
                                .measurement_filter_time = measurement_filter_time,
                                .setpoint_weight = setpoint_weight,
                                .action = value_of<tw::Action>("action", action)};
             }),
             "gain"_a = py::none(), py::kw_only(), "proportional_band"_a = py::none(), "integral_time"_a = py::none(),
             "repeats"_a = py::none(), "integral_gain"_a = py::none(), "derivative_time"_a = py::none(),
             "derivative_gain"_a = py::none(), "filter_time"_a = py::none(), "filter_ratio"_a = py::none(),
             "measurement_filter_time"_a = 0.0, "setpoint_weight"_a = 1.0, "action"_a = "reverse")
        .def_readonly("gain", &Entered::gain, "unsigned where the action is a switch")
        .def_readonly("proportional_band", &Entered::proportional_band, "percent")
        .def_readonly("integral_time", &Entered::integral_time, "in the form's integral unit")
        .def_readonly("repeats", &Entered::repeats, "per the form's integral unit")
        .def_readonly("integral_gain", &Entered::integral_gain, "per the form's integral unit")
        .def_readonly("derivative_time", &Entered::derivative_time, "in the form's derivative unit")
        .def_readonly("derivative_gain", &Entered::derivative_gain, "times the form's derivative unit")
        .def_readonly("filter_time", &Entered::filter_time, "in the form's derivative unit")
        .def_readonly("filter_ratio", &Entered::filter_ratio)
        .def_readonly("measurement_filter_time", &Entered::measurement_filter_time, "s")
        .def_readonly("setpoint_weight", &Entered::setpoint_weight)
        .def_property_readonly("action", [](const Entered& e) { return tw::name_of(e.action); })
        .def("__eq__", [](const Entered& a, const Entered& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const Entered& e) { return text_of(e); });
    m.def("entered_as", &tw::entered_as, "settings"_a, "form"_a,
          "The numbers to key in for settings, exact up to the rounding of the form's display.");
    m.def("settings_from", &tw::settings_from, "entered"_a, "form"_a,
          "The settings that numbers keyed into a controller of this form amount to; the inverse of entered_as.");
}

void bind_controller(py::module_& m) {
    using C = tw::InternalModelController;
    py::class_<C>(m, "InternalModelController",
                  "The exact synthesized controller C = Q / (1 - T), dead time inside; callable at a complex s.")
        .def_property_readonly("filter", &C::filter, "Q = T / G")
        .def_property_readonly("response", &C::response, "T, the closed loop asked for")
        .def_property_readonly("integrators", &C::integrators, "the order to which 1 - T vanishes at s = 0")
        .def("__call__", [](const C& c, const py::object& s) { return evaluated(c, s); }, "s"_a,
             "Value at a complex s in rad/s: a complex number, or an array of the shape of s.")
        .def("__eq__", [](const C& a, const C& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const C& c) { return "InternalModelController(" + c.text() + ", times in s)"; });
}

}  // namespace

void bind_control(py::module_& m) {
    bind_settings(m);
    bind_form(m);
    bind_entered(m);
    bind_controller(m);
}

}  // namespace binding
