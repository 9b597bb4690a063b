"""Published figures of margins, step responses and damping lines: what to ask for, and where it stands in the record."""

import math

#: Relative tolerances where they are wider than those of exact figures: margins and times from f64 functions, and an edge that is
#: searched for to 1e-6.
COMPUTED = {
    "gain margin": 1e-11,
    "phase margin": 1e-11,
    "rise time": 1e-9,
    "damping ratio of an overshoot": 1e-6,
}


def project_of(figure, plant_of):
    """The project of a figure; `plant_of` writes numerator and denominator."""
    system = figure["system"]
    if system["form"] == "closed-loop num/den":
        # N/F is closed around the open loop N/(F − N).
        num, den = list(system["num"]), list(system["den"])
        den = [d - n for d, n in zip(den, [0] * (len(den) - len(num)) + num)]
        plant = plant_of(num, [round(d, 12) for d in den])
    elif system["form"] == "formula":
        # The knob is twice the damping ratio at a natural frequency of 1.
        plant = "1/(s (s + K))"
    else:
        plant = plant_of(system["num"], system["den"])
    return {
        "format": "stayband-project/1",
        "title": figure["source"],
        "loop": {"controller": "1" if system["form"] == "formula" else "K", "plant": plant, "sensor": "1", "feedback": "negative"},
        "quantities": [],
        "knob": "K",
        "setting": {"value": figure.get("setting", "1")},
        "requirements": figure.get("requirements", []),
    }


def upper_end(record):
    """The upper end of the range that begins at the gain 0 or spans it."""
    ranges = record["requirements"][0]["ranges"]
    return next(r["to"]["knob"] for r in ranges if r["to"] and r["to"]["knob"] > 0)


def lower_end(record):
    """The lower end of the range of positive gains."""
    return record["requirements"][0]["ranges"][0]["from"]["knob"]


def pole_nearest(record, figure):
    """The closed-loop pole nearest to the printed one."""
    wanted = complex(*figure["expected"])
    pole = min(record["closedLoop"]["poles"], key=lambda p: abs(complex(p["re"], p["im"]) - wanted))
    return [pole["re"], pole["im"]]


def on_damping_line(record):
    """|s| of the slowest pole at the setting, and the gain at the end of the range."""
    slowest = min(math.hypot(p["re"], p["im"]) for p in record["closedLoop"]["poles"])
    return [slowest, upper_end(record)]


READ = {
    "gain margin": lambda record, figure: [20 * math.log10(record["margins"]["gainUp"])],
    "phase margin": lambda record, figure: [record["margins"]["phase"]],
    "rise time": lambda record, figure: [record["step"]["riseTime"]],
    "gain on the damping line": lambda record, figure: [upper_end(record)],
    "natural frequency and gain on the damping line": lambda record, figure: on_damping_line(record),
    "upper pole nearest": pole_nearest,
    "damping ratio of an overshoot": lambda record, figure: [lower_end(record) / 2],
}
