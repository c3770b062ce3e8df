#!/usr/bin/python3
"""The same record through C++, C and Python must give the same numbers to 1e-9.

compare_languages.py RESULTS RECORD: RESULTS holds what the C++ and the C example printed.
"""

import sys
from pathlib import Path

import tauwright as tw


def printed(path):
    pairs = [line.split() for line in Path(path).read_text().splitlines() if not line.startswith("found")]
    return {p[0]: float(p[1]) for p in pairs if len(p) == 2}


def through_python(path):
    record = tw.read_record(path)
    fit = tw.identify(record)
    process = tw.in_percent(fit.model, process_value_range=record.process_value_range, output_range=record.output_range)
    settings = tw.synthesize(process, tw.DesiredResponse(time_constant=2 * fit.dead_time)).settings
    margins = tw.robustness(process, settings, scan_time=1.0)
    controller = tw.PidBlock(settings, scan_time=1.0, output_low=0, output_high=100, initial_output=50)
    plant = tw.ProcessBlock(process, scan_time=1.0, rest_output=50, rest_process_value=50)
    controller.step(50, 50)
    value = output = 50.0
    for _ in range(10):
        output = controller.step(54, value)
        value = plant.step(output)
    return {
        "gain": fit.gain, "lag_1": fit.lags[0], "dead_time": fit.dead_time, "controller_gain": settings.gain,
        "integral_time_s": settings.integral_time, "gain_margin": margins.gain_margin,
        "phase_margin_deg": margins.phase_margin_deg, "max_sensitivity": margins.max_sensitivity, "block_output_10": output,
    }


def main():
    results, record = Path(sys.argv[1]), sys.argv[2]
    python = through_python(record)
    worst = 0.0
    for language in ("cxx", "c"):
        other = printed(results / f"{language}.txt")
        assert set(python) <= set(other), f"{language} printed {sorted(other)}"
        for key, value in python.items():
            difference = abs(other[key] - value) / abs(value)
            worst = max(worst, difference)
            assert difference <= 1e-9, f"{language}: {key} is {other[key]}, Python's is {value}"
    print(f"C++, C and Python agree on {len(python)} numbers to {worst:.1e}")


if __name__ == "__main__":
    main()
