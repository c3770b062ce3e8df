#!/usr/bin/python3
"""Writes bottle_washer.csv: an invented record of an invented loop, made to look like plant history.

The scenario is our own: the rinse-water temperature of a bottle washer, heated by a steam valve.
Run it to make the file again; equal seeds give the same file.
"""

import datetime
import math
import random

SEED = 41
GAIN, LAG, DEAD_TIME = 0.86, 95.0, 17.0  # degC per % output, s, s
START, REST_OUTPUT, REST_VALUE = datetime.datetime(2026, 3, 17, 9, 12, 4, 210000), 42.0, 61.4
MOVES = [(300.0, 47.0), (960.0, 42.0), (1620.0, 36.0), (2280.0, 42.0)]
END, SCAN = 2940.0, 4.0
GAP = (1290.0, 1350.0)
BAD = [(610.0, 640.0), (2016.0, 2022.0)]
NOISE, QUANTUM = 0.10, 0.05


def output_at(t):
    u = REST_OUTPUT
    for when, level in MOVES:
        if t >= when:
            u = level
    return u


def response(t, edges):
    y, previous = 0.0, REST_OUTPUT
    for when, level in edges:
        since = t - when - DEAD_TIME
        if since > 0:
            y += GAIN * (level - previous) * -math.expm1(-since / LAG)
        previous = level
    return REST_VALUE + y


def main():
    rng = random.Random(SEED)
    times, t = [], 0.0
    while t < END:
        if not GAP[0] <= t < GAP[1]:
            times.append(round(t, 3))
        t += SCAN + rng.choice([-0.4, -0.2, 0.0, 0.0, 0.0, 0.2, 0.4, 4.0 if rng.random() < 0.05 else 0.0])
    # The valve moves when the history first shows the new output.
    edges = [(min(x for x in times if x >= when), level) for when, level in MOVES]
    noise = 0.0
    lines = [
        "# Invented record: rinse-water temperature of a bottle washer, steam valve moved by hand",
        "# output_range: 0 100 %",
        "# process_value_range: 0 120 degC",
        "time,output,process_value,quality,setpoint,mode",
    ]
    for t in times:
        noise = 0.3 * noise + rng.gauss(0.0, NOISE)
        value = QUANTUM * round((response(t, edges) + noise) / QUANTUM)
        bad = any(a <= t < b for a, b in BAD)
        stamp = (START + datetime.timedelta(seconds=t)).strftime("%Y-%m-%dT%H:%M:%S.%f")[:-3] + "+01:00"
        shown = "Bad Input" if bad else f"{value:.2f}"
        lines.append(f"{stamp},{output_at(t):.1f},{shown},{'bad' if bad else 'good'},61.5,manual")
    with open("bottle_washer.csv", "w", newline="") as file:
        file.write("\r\n".join(lines) + "\r\n")


if __name__ == "__main__":
    main()
