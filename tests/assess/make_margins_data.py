"""Writes margins_data.hpp from the project's table of published check values (a CSV with the columns id, topic,
source, locator, provenance, status, given, quantity, value, tolerance, note).

Copies every margin of a loop this library can hold, with id, source and provenance; LOOPS says which loop an id
belongs to, in the names loops.hpp uses. Run once: python3 make_margins_data.py TABLE.csv > margins_data.hpp
"""
import csv
import sys

LOOPS = [  # id prefix, loop
    ("DS-SEB121-GM-tc1-exact", "SEB121 tc1"), ("DS-SEB121-GM-tc1-K0.9", "SEB121 tc1 K0.9"),
    ("DS-SEB121-GM-tc3-exact", "SEB121 tc3"), ("DS-SEB121-GM-tc3-K0.9", "SEB121 tc3 K0.9"),
    ("DS-SEB121-GM-tc10-exact", "SEB121 tc10"), ("DS-SEB121-GM-tc10-K0.9", "SEB121 tc10 K0.9"),
    ("DS-FO-gainerr0.9", "a 0.45"), ("DS-FO-gainerr1.1", "a 0.55"),
    ("DS-SEB124-b", "SEB124 b"), ("DS-SEB124-c", "SEB124 c"), ("DS-SEB124-d", "SEB124 d"),
    ("SIMC-T1-FO", "a 0.5"), ("SIMC-T1-INT", "SIMC INT"), ("SIMCINT", "SIMC INT"),
    ("iSIMC-delay", "iSIMC delay"), ("iSIMC-FO1", "iSIMC FO1"), ("iSIMC-FO8", "iSIMC FO8"),
    ("iSIMC2018-tc1", "iSIMC delay"), ("iSIMC2018", "iSIMC 2018"),
    ("INT-GM-0.25", "a 0.25"), ("INT-DM-0.25", "a 0.25"), ("INT-DM-0.5", "a 0.5"), ("INT-Ms-0.5", "a 0.5"),
    ("INT-GM-0.75", "a 0.75"), ("INT-DM-0.75", "a 0.75"), ("INT-Ms-0.75", "a 0.75"),
    ("INT-GM-1", "a 1"), ("INT-PM-1", "a 1"), ("INT-DM-1", "a 1"), ("INT-Ms-1", "a 1"),
    ("FO-tauc-0.5", "tauc 0.5"), ("FO-tauc-2", "tauc 2"), ("FO-tauc-4", "tauc 4"),
    ("LEE-FODUP-Ms", "LEE FODUP"),
    ("FO-Ku-0.2", "FO 0.2"), ("FO-Ku-0.5", "FO 0.5"), ("FO-Ku-1", "FO 1"), ("FO-Ku-5", "FO 5"),
    ("FO-wu-0.01", "FO 0.01"), ("FO-wu-0.1", "FO 0.1"), ("FO-wu-0.2", "FO 0.2"), ("FO-wu-1", "FO 1"),
    ("FO-wu-2", "FO 2"), ("FO-wu-5", "FO 5"), ("INT-Ku", "INT"), ("3LAG-Ku", "3LAG"), ("3EQ-Ku", "3EQ"),
]
for e in ["E1", "E4", "E6", "E7", "E9", "E10", "E13", "E14", "E15"]:
    for kind in ["PI", "PID"]:
        LOOPS.append(("SIMC-%s-%s-" % (e, kind), "%s %s" % (e, kind)))
QUANTITIES = {"GM": "GM", "PM": "PM", "PM_deg": "PM", "Ms": "Ms", "Mt": "Mt", "DM": "DM", "delay margin/theta": "DM",
              "w180*theta": "w180", "wc*theta": "wc", "K*Kcu": "Ku", "K Kcu": "Ku", "Kcu": "Ku", "wu*tau": "w180"}

print("// Made by make_margins_data.py from the project's table of published check values; do not edit.")
print("#pragma once\n\nnamespace oracle {\n")
print("struct MarginRow {\n    const char *id, *loop, *quantity;\n    double value, tolerance;  ///< tolerance relative where negative\n    const char *provenance, *source;\n};\n")
print("constexpr MarginRow margin_rows[] = {")
count = 0
for row in csv.DictReader(open(sys.argv[1], newline="")):
    loop = next((l for p, l in LOOPS if row["id"].startswith(p)), None)
    if loop is None or row["quantity"] not in QUANTITIES:
        continue
    loop += " printed" if row["provenance"].startswith("published") and loop[0] == "E" else ""
    tolerance = row["tolerance"].split()
    sign = "-" if tolerance[-1] == "rel" else ""
    print("    {\"%s\", \"%s\", \"%s\", %s, %s%s,\n     \"%s\",\n     \"%s\"}," % (
        row["id"], loop, QUANTITIES[row["quantity"]], row["value"], sign, tolerance[0], row["provenance"],
        row["source"].replace('"', "'")))
    count += 1
print("};  // %d rows\n\n}  // namespace oracle" % count)
