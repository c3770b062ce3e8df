#include "bind.hpp"

#include <charconv>

namespace binding {

namespace {

using tw::Error;
using tw::error_code;

// The array NumPy makes of a value; what it cannot make one of is refused by name.
py::array any_array(const char* name, py::handle value) {
    const py::module_ numpy = py::module_::import("numpy");
    if (py::hasattr(value, "mask") && py::isinstance(value, numpy.attr("ma").attr("MaskedArray")) &&
        py::bool_(numpy.attr("any")(numpy.attr("ma").attr("getmaskarray")(value))))
        throw Error(error_code::out_of_domain,
                    std::string(name) + " is a masked array with masked elements; give plain numbers, and say in good "
                                        "which samples to leave out");
    try {
        return numpy.attr("asarray")(value);
    } catch (py::error_already_set& error) {
        if (!error.matches(PyExc_ValueError) && !error.matches(PyExc_TypeError)) throw;
        throw Error(error_code::wrong_length, std::string(name) + " is not an array: " + std::string(py::str(error.value())));
    }
}

std::string kind_of(const py::array& array) { return py::str(array.dtype()); }

bool is_real(const py::array& array) {
    const char kind = array.dtype().kind();
    return kind == 'f' || kind == 'i' || kind == 'u' || kind == 'b';
}

void require_one_dimension(const char* name, const py::array& array) {
    if (array.ndim() != 1)
        throw Error(error_code::wrong_length, std::string(name) + " has " + std::to_string(array.ndim()) +
                                                  " dimensions; give an array of one dimension");
}

std::vector<double> doubles_of(const py::array& array) {
    const auto values = py::array_t<double, py::array::c_style | py::array::forcecast>::ensure(array);
    if (!values) throw py::error_already_set();
    return {values.data(), values.data() + values.size()};
}

double number_in(const char* name, py::handle value) {
    const double number = PyFloat_AsDouble(value.ptr());
    if (number == -1.0 && PyErr_Occurred()) {
        PyErr_Clear();
        throw Error(error_code::out_of_domain, std::string(name) + " is " + std::string(py::repr(value)) + "; give a number");
    }
    return number;
}

}  // namespace

std::vector<double> numbers_from(const char* name, py::handle value) {
    const py::array array = any_array(name, value);
    require_one_dimension(name, array);
    if (array.dtype().kind() == 'M' || array.dtype().kind() == 'm')
        throw Error(error_code::out_of_domain, std::string(name) + " holds dates (" + kind_of(array) +
                                                   "); give seconds as numbers, from any origin");
    if (!is_real(array) || array.dtype().kind() == 'b')
        throw Error(error_code::out_of_domain,
                    std::string(name) + " holds elements of type " + kind_of(array) + "; give real numbers");
    return doubles_of(array);
}

std::vector<std::uint8_t> marks_from(const char* name, py::handle value) {
    const py::array array = any_array(name, value);
    require_one_dimension(name, array);
    if (!is_real(array))
        throw Error(error_code::out_of_domain,
                    std::string(name) + " holds elements of type " + kind_of(array) + "; give booleans, or 0 and 1");
    const std::vector<double> numbers = doubles_of(array);
    std::vector<std::uint8_t> marks(numbers.size());
    for (std::size_t i = 0; i < numbers.size(); ++i) {
        if (numbers[i] != 0.0 && numbers[i] != 1.0)
            throw Error(error_code::out_of_domain, std::string(name) + "[" + std::to_string(i) + "] is " +
                                                       tw::text_of(numbers[i]) + "; give a boolean, or 0 or 1");
        marks[i] = numbers[i] != 0.0 ? 1 : 0;
    }
    return marks;
}

std::vector<std::uint8_t> modes_from(const char* name, py::handle value) {
    const py::array array = any_array(name, value);
    require_one_dimension(name, array);
    if (is_real(array)) return marks_from(name, array);
    std::vector<std::uint8_t> modes;
    for (const py::handle item : array) {
        const std::string place = std::string(name) + "[" + std::to_string(modes.size()) + "]";
        if (!py::isinstance<py::str>(item))
            throw Error(error_code::out_of_domain, place + " is " + std::string(py::repr(item)) +
                                                       "; give manual or automatic, or 0 or 1");
        const auto word = py::cast<std::string>(item);
        if (word != "manual" && word != "automatic")
            throw Error(error_code::unknown_name, place + " is '" + word + "'; use one of manual, automatic");
        modes.push_back(word == "automatic" ? 1 : 0);
    }
    return modes;
}

std::optional<tw::Range> range_from(const char* name, py::handle value) {
    if (value.is_none()) return std::nullopt;
    tw::Range range;
    if (py::isinstance<tw::Range>(value)) {
        range = py::cast<tw::Range>(value);
    } else {
        if ((!py::isinstance<py::tuple>(value) && !py::isinstance<py::list>(value)) || py::len(value) < 2 || py::len(value) > 3)
            throw Error(error_code::wrong_length, std::string(name) + " is " + std::string(py::repr(value)) +
                                                      "; give a Range, or (low, high) or (low, high, unit)");
        const auto items = py::cast<py::sequence>(value);
        range.low = number_in((std::string(name) + ".low").c_str(), items[0]);
        range.high = number_in((std::string(name) + ".high").c_str(), items[1]);
        range.unit = py::len(value) == 3 ? std::string(py::str(items[2])) : std::string();
    }
    tw::check(range, name);
    return range;
}

tw::Range needed_range_from(const char* name, py::handle value) {
    if (auto range = range_from(name, value)) return *range;
    throw Error(error_code::missing_range, std::string(name) + " is None; give a Range, or (low, high) or (low, high, unit)");
}

py::array_t<double> array_from(std::span<const double> values) {
    return py::array_t<double>(static_cast<py::ssize_t>(values.size()), values.data());
}

py::array_t<bool> array_of_marks(std::span<const std::uint8_t> marks) {
    py::array_t<bool> array(static_cast<py::ssize_t>(marks.size()));
    for (std::size_t i = 0; i < marks.size(); ++i) array.mutable_at(static_cast<py::ssize_t>(i)) = marks[i] != 0;
    return array;
}

py::tuple tuple_from(const std::vector<double>& values) {
    py::tuple tuple(values.size());
    for (std::size_t i = 0; i < values.size(); ++i) tuple[i] = values[i];
    return tuple;
}

py::array_t<Complex, py::array::c_style> complex_from(const char* name, py::handle value) {
    const py::array array = any_array(name, value);
    if (!is_real(array) && array.dtype().kind() != 'c')
        throw Error(error_code::out_of_domain,
                    std::string(name) + " holds elements of type " + kind_of(array) + "; give real or complex numbers");
    const auto numbers = py::array_t<Complex, py::array::c_style | py::array::forcecast>::ensure(array);
    if (!numbers) throw py::error_already_set();
    return numbers;
}

py::array_t<double, py::array::c_style> reals_from(const char* name, py::handle value) {
    const py::array array = any_array(name, value);
    if (!is_real(array))
        throw Error(error_code::out_of_domain,
                    std::string(name) + " holds elements of type " + kind_of(array) + "; give real numbers");
    const auto numbers = py::array_t<double, py::array::c_style | py::array::forcecast>::ensure(array);
    if (!numbers) throw py::error_already_set();
    return numbers;
}

py::str shown(const std::string& bytes) {
    return py::reinterpret_steal<py::str>(
        PyUnicode_DecodeUTF8(bytes.data(), static_cast<py::ssize_t>(bytes.size()), "replace"));
}

std::string text_of_range(const tw::Range& range) {
    return tw::text_of(range.low) + " to " + tw::text_of(range.high) + (range.unit.empty() ? "" : " " + range.unit);
}

std::string short_text(double value) {
    if (!tw::is_finite(value)) return tw::text_of(value);
    char buffer[32];
    const auto end = std::to_chars(buffer, buffer + sizeof buffer, value, std::chars_format::general, 6);
    return {buffer, end.ptr};
}

std::string optional_text(const std::optional<double>& value) { return value ? short_text(*value) : "None"; }

}  // namespace binding
