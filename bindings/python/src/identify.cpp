#include <pybind11/stl/filesystem.h>

#include <filesystem>

#include "bind.hpp"
#include "identify_options.hpp"

namespace binding {

namespace {

using tw::FittedModel;
using tw::Form;
using tw::Record;

constexpr std::array<Word<Form>, 3> form_words = {
    {{tw::name_of(Form::automatic), Form::automatic},
     {tw::name_of(Form::first_order_plus_dead_time), Form::first_order_plus_dead_time},
     {tw::name_of(Form::integrating_plus_dead_time), Form::integrating_plus_dead_time}}};

Record record_from(const py::object& time_s, const py::object& output, const py::object& process_value,
                   const py::object& good, const py::object& setpoint, const py::object& mode,
                   const py::object& output_range, const py::object& process_value_range) {
    tw::RecordColumns c;
    c.time_s = numbers_from("time_s", time_s);
    c.output = numbers_from("output", output);
    c.process_value = numbers_from("process_value", process_value);
    if (!good.is_none()) c.good = marks_from("good", good);
    if (!setpoint.is_none()) c.setpoint = numbers_from("setpoint", setpoint);
    if (!mode.is_none()) c.automatic = modes_from("mode", mode);
    // The library takes an empty array for one not given; here that difference can be told.
    const std::tuple<const char*, bool, std::size_t> optional[] = {
        {"good", !good.is_none(), c.good.size()},
        {"setpoint", !setpoint.is_none(), c.setpoint.size()},
        {"mode", !mode.is_none(), c.automatic.size()}};
    for (const auto& [name, given, length] : optional)
        if (given && length != c.time_s.size())
            throw tw::Error(tw::error_code::wrong_length, std::string(name) + " has " + std::to_string(length) +
                                                              " values, time_s has " + std::to_string(c.time_s.size()) +
                                                              "; give one value a sample in each");
    c.output_range = range_from("output_range", output_range);
    c.process_value_range = range_from("process_value_range", process_value_range);
    const py::gil_scoped_release released;  // from here on only C++ arrays are looked at
    return Record(std::move(c));
}

py::array_t<bool> good_of(const Record& r) {
    py::array_t<bool> good(static_cast<py::ssize_t>(r.size()));
    for (std::size_t i = 0; i < r.size(); ++i) good.mutable_at(static_cast<py::ssize_t>(i)) = r.good(i);
    return good;
}

py::object modes_of(const Record& r) {
    if (r.automatic().empty()) return py::none();
    const py::array automatic = array_of_marks(r.automatic());
    return py::module_::import("numpy").attr("where")(automatic, "automatic", "manual");
}

py::array_t<double> matrix(const std::vector<double>& values, std::size_t n) {
    const auto side = static_cast<py::ssize_t>(n);
    return py::array_t<double>({side, side}, values.data());
}

std::string unit_between(const Record& r) {
    const auto unit = [](const std::optional<tw::Range>& range) { return range && !range->unit.empty() ? range->unit : "?"; };
    return unit(r.process_value_range()) + " of process value, " + unit(r.output_range()) + " of output";
}

std::string text_of(const Record& r) {
    const double span = r.time_s().back() - r.time_s().front();
    return "Record(" + std::to_string(r.size()) + " samples over " + short_text(span) + " s, " +
           std::to_string(r.size() - r.good_count()) + " bad, " + unit_between(r) + ")";
}

std::string text_of(const FittedModel& fit) {
    if (!fit.model) return std::string("FittedModel(nothing fitted, advice=") + tw::name_of(fit.advice()) + ")";
    const bool integrating = fit.form == Form::integrating_plus_dead_time;
    Line line("FittedModel");
    line.add("form", tw::name_of(fit.form)).add(integrating ? "slope" : "gain", short_text(fit.gain), integrating ? "per s" : "");
    for (double lag : fit.lags) line.add("lag", short_text(lag), "s");
    return line.add("dead_time", short_text(fit.dead_time), "s")
        .add("residual_rms", short_text(fit.residual_rms))
        .add("advice", tw::name_of(fit.advice()))
        .done();
}

void bind_record(py::module_& m) {
    py::class_<Record>(m, "Record",
                       "A plant record of one loop, checked on the way in. Immutable; owns its arrays.\n\n"
                       "time_s: seconds from any origin, strictly increasing\n"
                       "output: controller output, held from its sample to the next\n"
                       "process_value: the measured value\n"
                       "good: False drops the process value; its output is still held\n"
                       "setpoint, mode: where known; mode as 'manual' or 'automatic', or 1 for automatic\n"
                       "output_range, process_value_range: Range, (low, high) or (low, high, unit)")
        .def(py::init(&record_from), "time_s"_a, "output"_a, "process_value"_a, "good"_a = py::none(), py::kw_only(),
             "setpoint"_a = py::none(), "mode"_a = py::none(), "output_range"_a = py::none(),
             "process_value_range"_a = py::none())
        .def("__len__", &Record::size)
        .def("__repr__", [](const Record& r) { return shown(text_of(r)); })
        .def_property_readonly("time_s", [](const Record& r) { return array_from(r.time_s()); })
        .def_property_readonly("output", [](const Record& r) { return array_from(r.output()); })
        .def_property_readonly("process_value", [](const Record& r) { return array_from(r.process_value()); })
        .def_property_readonly("good", &good_of)
        .def_property_readonly("setpoint",
                               [](const Record& r) -> py::object {
                                   if (r.setpoint().empty()) return py::none();
                                   return array_from(r.setpoint());
                               })
        .def_property_readonly("mode", &modes_of, "array of 'manual' and 'automatic', or None where not known")
        .def_property_readonly("output_range", [](const Record& r) { return r.output_range(); })
        .def_property_readonly("process_value_range", [](const Record& r) { return r.process_value_range(); })
        .def_property_readonly("source", [](const Record& r) { return shown(r.source()); }, "the file it was read from, or ''")
        .def_property_readonly("first_stamp", [](const Record& r) { return shown(r.first_stamp()); }, "when its first sample was taken, as written, or ''")
        .def("with_good", [](const Record& r, const py::object& good) { return r.with_good(marks_from("good", good)); },
             "good"_a, "The same record with other marks.")
        .def("sha256", &Record::sha256, py::call_guard<py::gil_scoped_release>(),
             "SHA-256 in hexadecimal of the file's bytes, or of the arrays time_s, output, process_value as\n"
             "little-endian doubles followed by one byte a sample for good.");

    m.def("read_record", [](const std::filesystem::path& path) { return tw::read_record(path.string()); }, "path"_a,
          py::call_guard<py::gil_scoped_release>(),
          "Reads a CSV file with the columns time_s (seconds) or time (RFC 3339), output, process_value, and optionally\n"
          "quality, setpoint, mode. Comment lines '# output_range: 0 100 %' and '# process_value_range: 0 120 degC'\n"
          "give the ranges.");
    m.def("read_record_text", [](std::string_view text, const std::string& name) { return tw::read_record_text(text, name); },
          "text"_a, py::kw_only(), "name"_a = "record", py::call_guard<py::gil_scoped_release>(),
          "As read_record, from text in memory; name stands for the file in messages.");
}

void bind_findings(py::module_& m) {
    py::class_<tw::Finding>(m, "Finding", "One thing found in a record.")
        .def_property_readonly("code", [](const tw::Finding& f) { return tw::name_of(f.code); })
        .def_property_readonly("advice", [](const tw::Finding& f) { return tw::name_of(f.advice); })
        .def_readonly("message", &tw::Finding::message, "what was found and what to do next")
        .def_readonly("value", &tw::Finding::value, "the number that shows it; the message says its meaning")
        .def_property_readonly("span", [](const tw::Finding& f) { return py::make_tuple(f.first, f.last); },
                               "first and last sample that show it")
        .def("__repr__", [](const tw::Finding& f) {
            return std::string("Finding(") + tw::name_of(f.code) + ", advice=" + tw::name_of(f.advice) + ": " + f.message + ")";
        });
    py::class_<tw::Move>(m, "Move", "The response to one output move, fitted with the model's lag and dead time.")
        .def_readonly("sample", &tw::Move::sample, "first sample of the new output")
        .def_readonly("size", &tw::Move::size, "in output units")
        .def_readonly("gain", &tw::Move::gain, "gain or slope from this move alone")
        .def_readonly("standard_error", &tw::Move::standard_error)
        .def("__repr__", [](const tw::Move& v) {
            return Line("Move").add("sample", std::to_string(v.sample)).add("size", v.size).add("gain", short_text(v.gain))
                .add("standard_error", short_text(v.standard_error)).done();
        });
}

void bind_fit(py::module_& m) {
    py::class_<FittedModel>(m, "FittedModel", "A model from a record, with its uncertainty and findings. Units of the record.")
        .def_property_readonly("form", [](const FittedModel& f) { return tw::name_of(f.form); })
        .def_readonly("form_reason", &FittedModel::form_reason, "why this form, in words")
        .def_readonly("model", &FittedModel::model, "TransferFunction, or None where nothing could be fitted")
        .def_readonly("gain", &FittedModel::gain, "gain, or slope per second, in process-value units per output unit")
        .def_property_readonly("lags", [](const FittedModel& f) { return tuple_from(f.lags); }, "s")
        .def_readonly("dead_time", &FittedModel::dead_time, "s")
        .def_readonly("first_output", &FittedModel::first_output, "the record's first output, where the fit starts at rest")
        .def_readonly("offset", &FittedModel::offset, "process value at rest at the first output")
        .def_readonly("drift_per_s", &FittedModel::drift_per_s)
        .def_readonly("drift_per_s2", &FittedModel::drift_per_s2)
        .def_property_readonly(
            "standard_errors",
            [](const FittedModel& f) {
                py::dict errors;
                for (const std::string& name : f.parameter_names) errors[py::str(name)] = f.standard_error(name).value();
                return errors;
            },
            "one standard deviation of each parameter fitted")
        .def_property_readonly("parameter_names", [](const FittedModel& f) { return py::tuple(py::cast(f.parameter_names)); },
                               "order of covariance")
        .def_property_readonly("covariance", [](const FittedModel& f) { return matrix(f.covariance, f.parameter_names.size()); })
        .def_readonly("sum_of_squares", &FittedModel::sum_of_squares, "of the residuals at the samples used")
        .def_readonly("residual_rms", &FittedModel::residual_rms, "root of sum_of_squares / samples_used")
        .def_readonly("noise", &FittedModel::noise, "root of sum_of_squares / degrees of freedom")
        .def_readonly("r_squared", &FittedModel::r_squared)
        .def_readonly("residual_correlation", &FittedModel::residual_correlation,
                      "of neighboring residuals; the standard errors are widened for it")
        .def_readonly("response_to_noise", &FittedModel::response_to_noise, "largest excursion of the response in units of noise")
        .def_property_readonly(
            "tested_output", [](const FittedModel& f) { return py::make_tuple(f.tested_output.low, f.tested_output.high); },
            "lowest and highest output of the record")
        .def_property_readonly(
            "tested_process_value",
            [](const FittedModel& f) { return py::make_tuple(f.tested_process_value.low, f.tested_process_value.high); },
            "lowest and highest process value among the samples used")
        .def_readonly("samples_used", &FittedModel::samples_used)
        .def_property_readonly("moves", [](const FittedModel& f) { return py::tuple(py::cast(f.moves)); })
        .def_property_readonly("findings", [](const FittedModel& f) { return py::tuple(py::cast(f.findings)); })
        .def_property_readonly("advice", [](const FittedModel& f) { return tw::name_of(f.advice()); },
                               "the gravest advice among the findings; 'tune' where there are none")
        .def("fitted",
             [](const FittedModel& f, const Record& record) {
                 std::vector<double> y;
                 {
                     const py::gil_scoped_release released;
                     y = tw::fitted_response(f, record);
                 }
                 return array_from(y);
             },
             "record"_a, "The fit's process value at every sample, bad ones included; empty where nothing was fitted.")
        .def("__repr__", [](const FittedModel& f) { return text_of(f); });

    m.def("identify",
          [](const Record& record, const std::string& form, bool drift, const py::object& fixed) {
              const tw::IdentifyOptions options{.form = value_of(form_words, "form", form), .drift = drift, .fixed = fixed_from(fixed)};
              const py::gil_scoped_release released;
              return tw::identify(record, options);
          },
          "record"_a, py::kw_only(), "form"_a = "auto", "drift"_a = false, "fixed"_a = py::none(),
          "A process model from a record: gain, lag and dead time by least squares, with standard errors and findings.\n\n"
          "form: 'auto', 'first_order_plus_dead_time' or 'integrating_plus_dead_time'\n"
          "drift: also fit a straight drift of the process value\n"
          "fixed: values to hold, by the names gain, slope, lag_1, dead_time, offset");
}

}  // namespace

tw::FixedParameters fixed_from(const py::object& fixed) {
    tw::FixedParameters f;
    if (fixed.is_none()) return f;
    if (!py::isinstance<py::dict>(fixed))
        throw tw::Error(tw::error_code::out_of_domain, "fixed is " + std::string(py::repr(fixed)) +
                                                           "; give a dictionary such as {'dead_time': 0}");
    using Member = std::optional<double>*;
    const std::array<Word<Member>, 5> members = {
        {{"gain", &f.gain}, {"slope", &f.slope}, {"lag_1", &f.lag_1}, {"dead_time", &f.dead_time}, {"offset", &f.offset}}};
    for (const auto& [key, value] : py::cast<py::dict>(fixed)) {
        const std::string word = py::str(key);
        std::optional<double>& member = *value_of(members, "a key of fixed", word);
        if (value.is_none()) continue;
        member = PyFloat_AsDouble(value.ptr());
        if (PyErr_Occurred()) {
            PyErr_Clear();
            throw tw::Error(tw::error_code::out_of_domain,
                            "fixed['" + word + "'] is " + std::string(py::repr(value)) + "; give a number, or None to fit it");
        }
    }
    return f;
}

tw::IdentifyOptions identify_options_from(const py::object& options) {
    tw::IdentifyOptions o;
    if (options.is_none()) return o;
    if (!py::isinstance<py::dict>(options))
        throw tw::Error(tw::error_code::out_of_domain, "identify is " + std::string(py::repr(options)) +
                                                           "; give a dictionary with the keys form, drift, fixed");
    constexpr std::array<Word<int>, 3> keys = {{{"form", 0}, {"drift", 1}, {"fixed", 2}}};
    for (const auto& [key, value] : py::cast<py::dict>(options)) {
        const int which = value_of(keys, "a key of identify", std::string(py::str(key)));
        if (which == 0) o.form = value_of(form_words, "identify['form']", std::string(py::str(value)));
        if (which == 1) {
            if (!py::isinstance<py::bool_>(value))
                throw tw::Error(tw::error_code::out_of_domain,
                                "identify['drift'] is " + std::string(py::repr(value)) + "; give True or False");
            o.drift = py::cast<bool>(value);
        }
        if (which == 2) o.fixed = fixed_from(py::reinterpret_borrow<py::object>(value));
    }
    return o;
}

void bind_identify(py::module_& m) {
    bind_findings(m);
    bind_record(m);
    bind_fit(m);
}

}  // namespace binding
