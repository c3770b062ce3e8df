// What the binding files share: arrays in and out, words for enumerations, text for repr.
#pragma once

#include <pybind11/complex.h>
#include <pybind11/numpy.h>
#include <pybind11/pybind11.h>
#include <pybind11/stl.h>

#include <array>
#include <complex>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "tauwright/tauwright.hpp"

namespace binding {

namespace py = pybind11;
namespace tw = tauwright;
using namespace py::literals;
using Complex = std::complex<double>;

// A function or more a floor, called by the module in the order of the floors.
void bind_core(py::module_& m);
void bind_model(py::module_& m);
void bind_identify(py::module_& m);
void bind_control(py::module_& m);
void bind_run(py::module_& m);
void bind_discretize(py::module_& m);
void bind_instruments(py::module_& m);
void bind_assess(py::module_& m);
void bind_trends(py::module_& m);
void bind_many_trends(py::module_& m);
void bind_uncertain(py::module_& m);
void bind_synthesize(py::module_& m);
void bind_tune(py::module_& m);
void bind_audit(py::module_& m);

/// A one-dimensional array of real numbers: any array-like of whole or floating numbers, strided or
/// not. Throws `wrong_length` for another shape and `out_of_domain` for another kind of element.
std::vector<double> numbers_from(const char* name, py::handle values);
/// An array of yes and no: booleans, or numbers that are 0 or 1.
std::vector<std::uint8_t> marks_from(const char* name, py::handle values);
/// An array of "manual" and "automatic", or of booleans or numbers where 1 is automatic.
std::vector<std::uint8_t> modes_from(const char* name, py::handle values);
/// A Range, or (low, high) or (low, high, unit). None is empty.
std::optional<tw::Range> range_from(const char* name, py::handle value);
/// As above where None is refused.
tw::Range needed_range_from(const char* name, py::handle value);

/// An array of its own memory.
py::array_t<double> array_from(std::span<const double> values);
py::array_t<bool> array_of_marks(std::span<const std::uint8_t> marks);
py::tuple tuple_from(const std::vector<double>& values);

/// Any array-like of numbers as complex ones; throws `out_of_domain` for other elements.
py::array_t<Complex, py::array::c_style> complex_from(const char* name, py::handle values);

/// The same as real ones; throws `out_of_domain` for complex elements too.
py::array_t<double, py::array::c_style> reals_from(const char* name, py::handle values);

/// f at every element of an array of any shape; without the interpreter's lock where there are many.
template <class F, class In>
py::object evaluated_over(const F& f, const py::array_t<In, py::array::c_style>& points) {
    if (points.ndim() == 0) return py::cast(Complex(f(*points.data())));
    py::array_t<Complex, py::array::c_style> values(
        std::vector<py::ssize_t>(points.shape(), points.shape() + points.ndim()));
    const In* in = points.data();
    Complex* out = values.mutable_data();
    const py::ssize_t n = points.size();
    const auto fill = [&] {
        for (py::ssize_t i = 0; i < n; ++i) out[i] = f(in[i]);
    };
    if (n > 100) {
        const py::gil_scoped_release released;
        fill();
    } else {
        fill();
    }
    return values;
}

/// f at one number or at every element of an array, complex or real.
template <class F>
py::object evaluated(const F& f, py::handle s, const char* name = "s") {
    return evaluated_over(f, complex_from(name, s));
}
template <class F>
py::object evaluated_at_reals(const F& f, py::handle x, const char* name) {
    return evaluated_over(f, reals_from(name, x));
}

template <class E>
using Word = std::pair<const char*, E>;

/// The value of a word; throws `unknown_name` with the words offered.
template <class E, std::size_t n>
E value_of(const std::array<Word<E>, n>& words, const char* name, std::string_view word) {
    std::string offered;
    for (const auto& [text, value] : words) {
        if (text == word) return value;
        offered += (offered.empty() ? "" : ", ") + std::string(text);
    }
    throw tw::Error(tw::error_code::unknown_name,
                    std::string(name) + " is '" + std::string(word) + "'; use one of " + offered);
}

template <class E, std::size_t n>
const char* word_of(const std::array<Word<E>, n>& words, E value) noexcept {
    for (const auto& [text, candidate] : words)
        if (candidate == value) return text;
    return "unknown";
}

/// The same for the enumerations that list their words, in the order of their values.
template <class E>
    requires requires(E e) { tw::words_of(e); }
E value_of(const char* name, std::string_view word) {
    constexpr auto words = tw::words_of(E{});
    std::array<Word<E>, words.size()> table;
    for (std::size_t i = 0; i < words.size(); ++i) table[i] = {words[i], static_cast<E>(i)};
    return value_of(table, name, word);
}

/// Collects "name=value unit" for a one-line repr.
class Line {
public:
    explicit Line(std::string head) : text_(std::move(head) + "(") {}
    Line& add(const char* name, const std::string& value, const std::string& unit = "") {
        if (text_.back() != '(') text_ += ", ";
        text_ += std::string(name) + "=" + value + (unit.empty() ? "" : " " + unit);
        return *this;
    }
    Line& add(const char* name, double value, const std::string& unit = "") { return add(name, tw::text_of(value), unit); }
    Line& add(const char* name, const std::optional<double>& value, const std::string& unit = "") {
        return value ? add(name, *value, unit) : *this;
    }
    /// Left out where it says nothing: the value is the usual one.
    Line& unless(double usual, const char* name, double value, const std::string& unit = "") {
        return value == usual ? *this : add(name, value, unit);
    }
    std::string done() const { return text_ + ")"; }

private:
    std::string text_;
};

/// Text that came from a file or a path and need not be UTF-8; what is not, is shown as U+FFFD.
py::str shown(const std::string& bytes);
std::string text_of_range(const tw::Range& range);
/// Six significant digits, for a repr that is read rather than read back.
std::string short_text(double value);
std::string optional_text(const std::optional<double>& value);
std::string text_of(const tw::ValveSettings& valve);
std::string text_of(const tw::TransmitterSettings& transmitter);

/// What it was the worst case of, so that it can be drawn.
struct KnownWorstCase : tw::WorstCase {
    tw::TransferFunction process;
    tw::PidSettings settings;
    double extra_delay = 0.0;
};

}  // namespace binding
