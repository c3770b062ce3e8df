#include "bind.hpp"

namespace binding {

namespace {

constexpr const char* error_doc =
    "Bad input. The message names the argument, the value and the remedy.\n\n"
    "code: the error's stable word, for example 'not_finite'\n"
    "value: its pinned number, the same in C and C++";

// Kept for the life of the process: the translator below outlives the module's variables.
PyObject* error_type = nullptr;

void set_error(const tw::Error& error) {
    const py::object instance = py::reinterpret_borrow<py::object>(error_type)(shown(error.what()));
    instance.attr("code") = tw::name_of(error.code());
    instance.attr("value") = static_cast<int>(error.code());
    PyErr_SetObject(error_type, instance.ptr());
}

py::dict codes() {
    py::dict words;
#define TAUWRIGHT_ERROR(name, value, meaning) words[#name] = value;
#include "tauwright/core/errors.def"
#undef TAUWRIGHT_ERROR
    return words;
}

}  // namespace

void bind_core(py::module_& m) {
    py::dict members;
    members["code"] = tw::name_of(tw::error_code::internal);
    members["value"] = static_cast<int>(tw::error_code::internal);
    error_type = PyErr_NewExceptionWithDoc("tauwright.Error", error_doc, PyExc_Exception, members.ptr());
    if (error_type == nullptr) throw py::error_already_set();
    m.attr("Error") = py::reinterpret_borrow<py::object>(error_type);
    m.attr("error_codes") = codes();
    py::register_exception_translator([](std::exception_ptr pointer) {
        try {
            if (pointer) std::rethrow_exception(pointer);
        } catch (const tw::Error& error) {
            set_error(error);
        }
    });

    py::class_<tw::Range>(m, "Range", "What 0 % and 100 % of an instrument mean: low and high end, in `unit`.")
        .def(py::init([](double low, double high, std::string unit) {
                 tw::Range range{low, high, std::move(unit)};
                 tw::check(range, "range");
                 return range;
             }),
             "low"_a, "high"_a, "unit"_a = "")
        .def_readonly("low", &tw::Range::low)
        .def_readonly("high", &tw::Range::high)
        .def_property_readonly("unit", [](const tw::Range& r) { return shown(r.unit); })
        .def_property_readonly("span", &tw::Range::span, "high - low, in the range's unit")
        .def("to_percent", &tw::Range::to_percent, "value"_a, "Percent of span of a value in the range's unit.")
        .def("from_percent", &tw::Range::from_percent, "percent"_a, "Value in the range's unit at a percent of span.")
        .def("__eq__", [](const tw::Range& a, const tw::Range& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const tw::Range& r) { return shown("Range(" + text_of_range(r) + ")"); });
}

}  // namespace binding
