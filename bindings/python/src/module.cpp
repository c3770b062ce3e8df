// The extension module. Everything public is re-exported by the package's __init__.py.
#include "bind.hpp"

PYBIND11_MODULE(_tauwright, m) {
    using namespace binding;
    m.doc() = "Compiled part of tauwright; import tauwright instead.";
    m.attr("__version__") = tw::version;
    bind_core(m);
    bind_model(m);
    bind_identify(m);
    bind_control(m);
    bind_run(m);
    bind_discretize(m);
    bind_instruments(m);
    bind_assess(m);
    bind_trends(m);
    bind_uncertain(m);
    bind_synthesize(m);
    bind_tune(m);
    bind_audit(m);
    // Names belong to the package, not to the file they come from.
    for (auto item : py::cast<py::dict>(m.attr("__dict__")))
        if (py::isinstance<py::type>(item.second)) item.second.attr("__module__") = "tauwright";
}
