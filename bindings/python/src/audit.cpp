#include <functional>

#include "bind.hpp"

namespace binding {

namespace {

using tw::AuditLoop;
using tw::AuditRow;
using tw::AuditSide;
using tw::AuditSummary;

// An audit as Python holds it: the rows, and whether there are fewer than loops.
struct Audit {
    std::vector<AuditRow> rows;
    AuditSummary summary;
};

std::string repr_of(const auto& value) { return std::string(py::repr(py::cast(value))); }

// The caller's progress, and a look for Ctrl-C even without one. Called without the interpreter's lock.
std::function<bool(std::size_t)> progress_from(const py::object& progress) {
    return [&progress](std::size_t done) {
        const py::gil_scoped_acquire held;
        if (PyErr_CheckSignals() != 0) throw py::error_already_set();
        if (progress.is_none()) return true;
        const py::object answer = progress(done);
        return answer.is_none() || py::cast<bool>(answer);
    };
}

AuditSummary run(const py::object& loops, const std::function<void(const AuditRow&)>& sink, unsigned threads,
                 const py::object& progress) {
    const py::iterator all = py::iter(py::isinstance<AuditLoop>(loops) ? py::make_tuple(loops) : loops);
    const auto source = [&all](AuditLoop& loop) {
        const py::gil_scoped_acquire held;
        const auto next = py::reinterpret_steal<py::object>(PyIter_Next(all.ptr()));
        if (PyErr_Occurred() != nullptr) throw py::error_already_set();
        if (!next) return false;
        if (!py::isinstance<AuditLoop>(next))
            throw tw::Error(tw::error_code::unknown_name, "loops holds " + std::string(py::repr(py::type::of(next))) +
                                                              "; give objects of AuditLoop");
        loop = py::cast<const AuditLoop&>(next);
        return true;
    };
    const tw::AuditOptions options{.threads = threads, .progress = progress_from(progress)};
    const py::gil_scoped_release released;
    return tw::audit(source, sink, options);
}

std::string text_of(const AuditLoop& loop) {
    Line line("AuditLoop");
    line.add("process", loop.process ? loop.process->text() : "None");
    if (!loop.name.empty()) line.add("name", "'" + loop.name + "'");
    if (loop.settings) line.add("settings", repr_of(*loop.settings));
    if (loop.entered) line.add("entered", repr_of(*loop.entered));
    if (loop.form) line.add("form", repr_of(*loop.form));
    if (loop.proposal) line.add("proposal", repr_of(*loop.proposal));
    line.add("duty", repr_of(loop.duty)).add("horizon", loop.horizon, "s");
    if (loop.process_gain_unit != tw::GainUnit::percent) line.add("process_gain_unit", "'engineering'");
    return line.done();
}

std::string text_of(const AuditSummary& s) {
    Line line("AuditSummary");
    line.add("rows", std::to_string(s.rows)).add("changes_worthwhile", std::to_string(s.changes_worthwhile))
        .add("unstable_in_service", std::to_string(s.unstable_in_service)).add("weak_in_service", std::to_string(s.weak_in_service))
        .add("failed", std::to_string(s.failed));
    if (s.cancelled) line.add("cancelled", "True");
    return line.done();
}

void bind_loop(py::module_& m) {
    py::class_<AuditLoop>(m, "AuditLoop",
                          "One loop to audit. Immutable.\n\n"
                          "process: its gain in percent of span, or in engineering units of the form's ranges\n"
                          "settings: in service, PidSettings; or entered: the numbers as they stand in form\n"
                          "form: the ControllerForm; every side is then shown in its numbers\n"
                          "proposal: PidSettings; None: one is made\n"
                          "duty: scan time for margins and trends, steps for the figures\n"
                          "horizon: of both trends, s; None: chosen")
        .def(py::init([](std::optional<tw::TransferFunction> process, std::optional<tw::PidSettings> settings, std::string name,
                         std::optional<tw::Entered> entered, std::optional<tw::ControllerForm> form,
                         std::optional<tw::PidSettings> proposal, std::optional<tw::Duty> duty, std::optional<double> horizon,
                         std::string_view process_gain_unit) {
                 return AuditLoop{.name = std::move(name),
                                  .process = std::move(process),
                                  .process_gain_unit = value_of<tw::GainUnit>("process_gain_unit", process_gain_unit),
                                  .settings = settings,
                                  .entered = entered,
                                  .form = std::move(form),
                                  .proposal = proposal,
                                  .duty = duty.value_or(tw::Duty{}),
                                  .horizon = horizon};
             }),
             "process"_a, "settings"_a = py::none(), py::kw_only(), "name"_a = "", "entered"_a = py::none(), "form"_a = py::none(),
             "proposal"_a = py::none(), "duty"_a = py::none(), "horizon"_a = py::none(), "process_gain_unit"_a = "percent")
        .def_readonly("name", &AuditLoop::name)
        .def_readonly("process", &AuditLoop::process)
        .def_readonly("settings", &AuditLoop::settings)
        .def_readonly("entered", &AuditLoop::entered)
        .def_readonly("form", &AuditLoop::form)
        .def_readonly("proposal", &AuditLoop::proposal)
        .def_readonly("duty", &AuditLoop::duty)
        .def_readonly("horizon", &AuditLoop::horizon, "s, or None")
        .def_property_readonly("process_gain_unit", [](const AuditLoop& l) { return tw::name_of(l.process_gain_unit); },
                               "'percent' or 'engineering'")
        .def("__eq__", [](const AuditLoop& a, const AuditLoop& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const AuditLoop& l) { return shown(text_of(l)); });
}

void bind_row(py::module_& m) {
    py::class_<AuditSide>(m, "AuditSide", "In service, or proposed: settings, what they are in the controller, and what they do.")
        .def_readonly("settings", &AuditSide::settings, "PidSettings, after exact conversion")
        .def_readonly("entered", &AuditSide::entered, "in the loop's form; None without one, or where it cannot hold them")
        .def_readonly("margins", &AuditSide::margins, "Robustness, with scan time and every filter")
        .def_readonly("figures", &AuditSide::figures, "Figures; None without scan time or step, or where the loop is not stable")
        .def("__eq__", [](const AuditSide& a, const AuditSide& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const AuditSide& s) {
            Line line("AuditSide");
            line.add("settings", repr_of(s.settings)).add("margins", repr_of(s.margins));
            if (s.figures) line.add("figures", repr_of(*s.figures));
            return shown(line.done());
        });
    py::class_<AuditRow>(m, "AuditRow", "The audit of one loop: both sides under one duty, and what it comes to.")
        .def_readonly("name", &AuditRow::name)
        .def_readonly("form", &AuditRow::form)
        .def_readonly("in_service", &AuditRow::in_service, "AuditSide, or None where it could not be judged")
        .def_readonly("proposal", &AuditRow::proposal, "AuditSide, or None where there is none")
        .def_readonly("proposal_made", &AuditRow::proposal_made, "here, because none was given")
        .def_readonly("horizon", &AuditRow::horizon, "s, of the trends; 0 without figures")
        .def_property_readonly("outcome", [](const AuditRow& r) { return tw::name_of(r.outcome); },
                               "'failed', 'unstable_in_service', 'weak_in_service', 'proposal_better', 'no_case', 'trade_off',\n"
                               "'proposal_worse', 'no_proposal' or 'undetermined'")
        .def_readonly("change_worthwhile", &AuditRow::change_worthwhile)
        .def_readonly("reason", &AuditRow::reason, "one line: the main point in words and numbers")
        .def_property_readonly("code", [](const AuditRow& r) { return tw::name_of(r.code); }, "of what failed; 'ok' when nothing did")
        .def_readonly("error", &AuditRow::error, "what failed and the remedy; '' when nothing did")
        .def("text", [](const AuditRow& r) { return shown(r.text()); }, "Both sides beside each other, 78 columns.")
        .def("__eq__", [](const AuditRow& a, const AuditRow& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const AuditRow& r) {
            Line line("AuditRow");
            if (!r.name.empty()) line.add("name", "'" + r.name + "'");
            line.add("outcome", std::string("'") + tw::name_of(r.outcome) + "'").add("reason", "'" + r.reason + "'");
            if (!r.error.empty()) line.add("error", "'" + r.error + "'");
            return shown(line.done());
        });
    py::class_<AuditSummary>(m, "AuditSummary", "Counts over the rows delivered.")
        .def_readonly("rows", &AuditSummary::rows)
        .def_readonly("failed", &AuditSummary::failed, "rows with an error, whatever else they hold")
        .def_readonly("unstable_in_service", &AuditSummary::unstable_in_service)
        .def_readonly("weak_in_service", &AuditSummary::weak_in_service)
        .def_readonly("changes_worthwhile", &AuditSummary::changes_worthwhile)
        .def_readonly("cancelled", &AuditSummary::cancelled)
        .def("__eq__", [](const AuditSummary& a, const AuditSummary& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const AuditSummary& s) { return text_of(s); });
}

const AuditRow& row_at(const Audit& audit, py::ssize_t index) {
    const auto n = static_cast<py::ssize_t>(audit.rows.size());
    if (index < 0) index += n;
    if (index < 0 || index >= n) throw py::index_error("an audit of " + std::to_string(n) + " rows has no such row");
    return audit.rows[static_cast<std::size_t>(index)];
}

}  // namespace

void bind_audit(py::module_& m) {
    bind_loop(m);
    bind_row(m);
    py::class_<Audit>(m, "Audit", "The rows of an audit, in the order of the loops: len, [], iteration; print(audit.text()).")
        .def_readonly("summary", &Audit::summary, "AuditSummary")
        .def("text", [](const Audit& a) { return shown(tw::text_of(a.rows)); }, "A table of 78 columns, a line and its reason a loop.")
        .def("__len__", [](const Audit& a) { return a.rows.size(); })
        .def("__getitem__", &row_at, "index"_a, py::return_value_policy::reference_internal)
        .def("__iter__", [](const Audit& a) { return py::make_iterator(a.rows.begin(), a.rows.end()); }, py::keep_alive<0, 1>())
        .def("__eq__", [](const Audit& a, const Audit& b) { return a.rows == b.rows && a.summary == b.summary; }, py::is_operator())
        .def("__repr__", [](const Audit& a) { return "Audit(" + text_of(a.summary) + ")"; });
    m.def("audit",
          [](const py::object& loops, unsigned threads, const py::object& progress) {
              Audit audit;
              audit.summary = run(loops, [&](const AuditRow& row) { audit.rows.push_back(row); }, threads, progress);
              return audit;
          },
          "loops"_a, py::kw_only(), "threads"_a = 1, "progress"_a = py::none(),
          "What the settings in service really do, beside a proposal, for an AuditLoop or any iterable of them.\n\n"
          "What is wrong with a loop is in its row. Rows are equal for any number of threads (1 to 1024).\n"
          "progress: called with the number of loops done; returning False ends the audit with the rows so far");
    m.def("audit_stream",
          [](const py::object& loops, const py::function& sink, unsigned threads, const py::object& progress) {
              const auto take = [&sink](const AuditRow& row) {
                  const py::gil_scoped_acquire held;
                  sink(row);
              };
              return run(loops, take, threads, progress);
          },
          "loops"_a, "sink"_a, py::kw_only(), "threads"_a = 1, "progress"_a = py::none(),
          "As audit, in memory for at most 64 loops a thread: hands each AuditRow to sink and returns the AuditSummary.");
}

}  // namespace binding
