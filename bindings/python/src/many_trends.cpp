// Trends of many loops at once, into two tables.
#include "bind.hpp"
#include "tauwright/assess/simulate_many.hpp"

namespace binding {

namespace {

struct ManyTrends {
    py::array_t<double> time_s, process_value, output;
};

// Pairs in any sequence. The casters are looked up once for all elements.
std::vector<tw::LoopToSimulate> loops_from(const py::sequence& pairs) {
    std::vector<tw::LoopToSimulate> loops;
    loops.reserve(pairs.size());
    py::detail::make_caster<tw::TransferFunction> process;
    py::detail::make_caster<tw::PidSettings> settings;
    for (const py::handle item : pairs) {
        const bool pair = (py::isinstance<py::tuple>(item) || py::isinstance<py::list>(item)) && py::len(item) == 2;
        const auto part = [&](py::ssize_t i) { return py::reinterpret_steal<py::object>(PySequence_GetItem(item.ptr(), i)); };
        if (!pair || !process.load(part(0), false) || !settings.load(part(1), false))
            throw py::type_error("loops[" + std::to_string(loops.size()) + "] is " + std::string(py::repr(item)) +
                                 "; give a pair (TransferFunction, PidSettings)");
        loops.push_back({py::detail::cast_op<const tw::TransferFunction&>(process), py::detail::cast_op<const tw::PidSettings&>(settings)});
    }
    return loops;
}

py::array_t<double> table(std::size_t scans, std::size_t loops) {
    return py::array_t<double>({static_cast<py::ssize_t>(scans), static_cast<py::ssize_t>(loops)});
}

// Users see these arrays read-only; the library may write.
std::span<double> values_of(const py::array_t<double>& array) {
    return {const_cast<double*>(array.data()), static_cast<std::size_t>(array.size())};
}

ManyTrends fresh(std::size_t scans, std::size_t loops) {
    ManyTrends many{py::array_t<double>(static_cast<py::ssize_t>(scans)), table(scans, loops), table(scans, loops)};
    for (py::array* array : {&many.time_s, &many.process_value, &many.output}) array->attr("setflags")("write"_a = false);
    return many;
}

ManyTrends& checked(ManyTrends& into, std::size_t scans, std::size_t loops) {
    const auto has = [&](py::ssize_t axis) { return static_cast<std::size_t>(into.process_value.shape(axis)); };
    if (has(0) != scans || has(1) != loops)
        throw tw::Error(tw::error_code::wrong_length,
                        "into holds " + std::to_string(has(0)) + " scans of " + std::to_string(has(1)) + " loops; give one that holds " +
                            std::to_string(scans) + " scans of " + std::to_string(loops) + " loops, or None");
    return into;
}

ManyTrends simulate_many(const py::sequence& pairs, const tw::Duty& duty, double horizon, std::optional<ManyTrends> into) {
    const std::vector<tw::LoopToSimulate> loops = loops_from(pairs);
    const std::size_t scans = tw::scans_of(duty, horizon);
    ManyTrends many = into ? checked(*into, scans, loops.size()) : fresh(scans, loops.size());
    const std::span<double> time_s = values_of(many.time_s), process_value = values_of(many.process_value), output = values_of(many.output);
    for (std::size_t k = 0; k < scans; ++k) time_s[k] = static_cast<double>(k) * *duty.scan_time;
    py::gil_scoped_release release;
    tw::simulate_many(loops, duty, horizon, process_value, output);
    return many;
}

}  // namespace

void bind_many_trends(py::module_& m) {
    py::class_<ManyTrends>(m, "ManyTrends", "Trends of many loops: one row a scan, one column a loop in the order given. Read-only arrays.")
        .def_readonly("time_s", &ManyTrends::time_s, "of the rows")
        .def_readonly("process_value", &ManyTrends::process_value, "scans by loops")
        .def_readonly("output", &ManyTrends::output, "scans by loops")
        .def("__repr__", [](const ManyTrends& t) {
            return "ManyTrends(" + std::to_string(t.process_value.shape(1)) + " loops, " + std::to_string(t.process_value.shape(0)) + " scans)";
        });
    m.def("simulate_many", &simulate_many, "loops"_a, "duty"_a, py::kw_only(), "horizon"_a, "into"_a = py::none(),
          "What simulate gives for each (process, settings) of loops under the same duty, to the last bit: about 3 ns a loop\n"
          "and scan for processes of up to two states. Where an unstable process ran away its last values are repeated.\n"
          "into: ManyTrends of an earlier call with as many scans and loops, whose arrays are overwritten: saves new memory");
}

}  // namespace binding
