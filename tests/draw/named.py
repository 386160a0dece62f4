"""The named diagrams that must meet the whole quality bar."""

from __future__ import annotations

from board import board

from flowgraph.diagram.diagram import Diagram

LEAKY = board("leaky", "input x; output y; adder y = x + a*y1; delay y1 = y", title="Leaky integrator")
DF1 = board(
    "df1",
    "input x; output y; delay x1 = x; delay x2 = x1; delay y1 = y; delay y2 = y1",
    "adder v = b0*x + b1*x1 + b2*x2; adder y = v - a1*y1 - a2*y2",
    title="Direct form I section",
)
DF1_ONE_ADDER = board(
    "df1_one_adder",
    "input x; output y; delay x1 = x; delay x2 = x1; delay y1 = y; delay y2 = y1",
    "adder y = b0*x + b1*x1 + b2*x2 - a1*y1 - a2*y2",
    title="Direct form I, one adder",
)
DF2 = board(
    "df2",
    "input x; output y; adder w = x - a1*w1 - a2*w2; delay w1 = w; delay w2 = w1",
    "adder y = b0*w + b1*w1 + b2*w2",
    title="Direct form II section",
)
TDF2 = board(
    "tdf2",
    "input x; output y; adder y = b0*x + s1; delay s1 = t1; adder t1 = b1*x - a1*y + s2; delay s2 = t2",
    "adder t2 = b2*x - a2*y",
    title="Transposed direct form II section",
)


def fir(taps: int) -> Diagram:
    """A direct FIR filter with one adder."""
    delays = "; ".join(f"delay x{k} = x{k - 1 if k > 1 else ''}" for k in range(1, taps))
    terms = " + ".join(f"h{k}*x{k if k else ''}" for k in range(taps))
    return board(f"fir{taps}", f"input x; output y; {delays}; adder y = {terms}", title=f"{taps}-tap FIR filter")


def transposed_fir(taps: int) -> Diagram:
    """The transposed FIR filter: one input line, delays between the adders."""
    lines = [f"delay s{taps - 1} = p; gain p = h{taps - 1}*x"]
    for k in range(taps - 2, -1, -1):
        name = f"t{k}" if k else "y"
        lines.append(f"adder {name} = h{k}*x + s{k + 1}")
        if k:
            lines.append(f"delay s{k} = {name}")
    return board(f"fir{taps}_transposed", "input x; output y", *lines, title=f"{taps}-tap transposed FIR filter")


def moving_average(length: int) -> Diagram:
    """The non-recursive mean of the last samples."""
    delays = "; ".join(f"delay x{k} = x{k - 1 if k > 1 else ''}" for k in range(1, length))
    terms = " + ".join(f"x{k if k else ''}" for k in range(length))
    return board(
        f"mean{length}",
        f"input x; output y; {delays}; adder sum = {terms}; gain y = 1/{length}*sum",
        title=f"{length}-point moving average",
    )


RECURSIVE_MEAN = board(
    "recursive_mean",
    "input x; output y; delay line = x by 8; adder d = x - line; adder s = d + s1; delay s1 = s; gain y = 1/8*s",
    title="8-point moving average, recursive",
)


def cascade(sections: int) -> Diagram:
    """Direct form II sections one behind the other."""
    lines = ["input x"]
    source = "x"
    for k in range(1, sections + 1):
        target = "y" if k == sections else f"v[{k}]"
        lines.append(f"adder w[{k}] = {source} - a1{k}*w1[{k}] - a2{k}*w2[{k}]; delay w1[{k}] = w[{k}]")
        lines.append(f"delay w2[{k}] = w1[{k}]; adder {target} = b0{k}*w[{k}] + b1{k}*w1[{k}] + b2{k}*w2[{k}]")
        source = target
    return board(f"cascade{sections}", *lines, "output y", title=f"{sections}-section cascade")


def cascade_df1(sections: int) -> Diagram:
    """Direct form I sections one behind the other."""
    lines = ["input x"]
    source = "x"
    for k in range(1, sections + 1):
        y = "y" if k == sections else f"v[{k}]"
        lines.append(f"delay x1[{k}] = {source}; delay x2[{k}] = x1[{k}]; delay y1[{k}] = {y}; delay y2[{k}] = y1[{k}]")
        lines.append(f"adder {y} = b0{k}*{source} + b1{k}*x1[{k}] + b2{k}*x2[{k}] - a1{k}*y1[{k}] - a2{k}*y2[{k}]")
        source = y
    return board(f"cascade_df1_{sections}", *lines, "output y", title=f"{sections} sections, direct form I")


ALL_PASS = board(
    "all_pass",
    "input x; output y; adder w = x + g*w1; delay w1 = w; adder y = w1 - g*w",
    title="First-order all-pass",
)
ALL_POLE_LATTICE = board(
    "all_pole_lattice",
    "input x; output y; output v; adder f2 = x - k3*d3; adder f1 = f2 - k2*d2; adder y = f1 - k1*d1",
    "delay d1 = y; adder g1 = d1 + k1*y; delay d2 = g1; adder g2 = d2 + k2*f1; delay d3 = g2",
    "adder v = d3 + k3*f2",
    title="All-pole lattice, order 3",
)
FIR_LATTICE = board(
    "fir_lattice",
    "input x; output y; output v; delay d1 = x; adder f1 = x + k1*d1; adder g1 = d1 + k1*x; delay d2 = g1",
    "adder f2 = f1 + k2*d2; adder g2 = d2 + k2*f1; delay d3 = g2; adder y = f2 + k3*d3; adder v = d3 + k3*f2",
    title="FIR lattice, order 3",
)
PARALLEL = board(
    "parallel",
    "input x; output y; adder w = x - a11*w1 - a21*w2; delay w1 = w; delay w2 = w1; adder p = b01*w + b11*w1",
    "adder q = x - a12*q1 - a22*q2; delay q1 = q; delay q2 = q1; adder r = b02*q + b12*q1; adder y = p + r",
    title="Parallel form, two sections",
)
STATE_VARIABLE = board(
    "state_variable",
    "input x; output low; output high; output band; adder high = x - low1 - q*band1; adder band = f*high + band1",
    "delay band1 = band; adder low = f*band1 + low1; delay low1 = low",
    title="State-variable filter",
)
COMB = board("comb", "input x; output y; adder y = x + g*late; delay late = y by 1200", title="Comb with a long line")
PI_LOOP = board(
    "pi_loop",
    "input r; input m; output u; adder e = r - m; adder i = i1 + Ki*e; delay i1 = i; adder u = Kp*e + i",
    title="PI loop",
)
OSCILLATOR = board(
    "oscillator", "output y; adder y = c*y1 - y2; delay y1 = y starts 1; delay y2 = y1", title="Oscillator"
)
TWO_BY_TWO = board(
    "two_by_two",
    "input u1; input u2; output y1; output y2; adder y1 = u1 + c*d1 - s*d2; adder y2 = u2 + s*d1 + c*d2",
    "delay d1 = y1; delay d2 = y2",
    title="Coupled section, two in two out",
)
MIXER = board(
    "mixer",
    "input u1; input u2; output y1; output y2; delay d1 = u1; delay d2 = u2",
    "adder y1 = g11*u1 + g12*d2; adder y2 = g22*u2 + g21*d1",
    title="Crossover mixer, two in two out",
)
PID = board(
    "pid",
    "input r; input m; output u; adder e = r - m; gain p = Kd*e; delay p1 = p; adder d = p - p1",
    "adder i = i1 + Ki*e; delay i1 = i; adder u = Kp*e + d + i",
    title="PID",
)
CIC = board(
    "cic",
    "input x; output y; adder s1 = x + p1; delay p1 = s1; adder s2 = s1 + p2; delay p2 = s2; adder s3 = s2 + p3",
    "delay p3 = s3; delay q1 = s3; adder c1 = s3 - q1; delay q2 = c1; adder c2 = c1 - q2; delay q3 = c2",
    "adder y = c2 - q3",
    title="CIC, 3 stages",
)
DELAY_FREE_LOOP = board(
    "delay_free_loop",
    "input x; output y; adder s = x - 0.5*u - q*y1; adder u = k*s + c*y1; delay y1 = y; adder y = u + d*y1",
    title="Delay-free loop",
)
LATTICE_LADDER = board(
    "lattice_ladder",
    "input x; output y; adder f2 = x - k3*d3; adder f1 = f2 - k2*d2; adder f0 = f1 - k1*d1",
    "delay d1 = f0; adder g1 = d1 + k1*f0; delay d2 = g1; adder g2 = d2 + k2*f1; delay d3 = g2",
    "adder g3 = d3 + k3*f2; adder c2 = v3*g3 + v2*g2; adder c1 = c2 + v1*g1; adder y = v0*f0 + c1",
    title="Lattice-ladder",
)
TWO_LINES = board(
    "two_lines",
    "input x; output y; adder w = x - a1*p1 - a2*p2; delay p1 = w; delay p2 = p1; delay q1 = w; delay q2 = q1",
    "adder y = b0*w + b1*q1 + b2*q2",
    title="Direct form II, two lines",
)
WIRE = board("straight", "input x; output y = x", title="A wire")

FOLDED_FIR = board(
    "folded_fir",
    "input x; output y; delay x1 = x; delay x2 = x1; delay x3 = x2; delay x4 = x3; delay x5 = x4; delay x6 = x5",
    "adder p0 = x + x6; adder p1 = x1 + x5; adder p2 = x2 + x4; adder y = h0*p0 + h1*p1 + h2*p2 + h3*x3",
    title="Linear-phase FIR, folded",
)
MATRIX = board(
    "matrix",
    "input x; output y; delay d1 = s1 by 7; delay d2 = s2 by 11; delay d3 = s3 by 13",
    "adder s1 = x + m11*d1 + m12*d2 + m13*d3; adder s2 = x + m21*d1 + m22*d2 + m23*d3",
    "adder s3 = x + m31*d1 + m32*d2 + m33*d3; adder y = d1 + d2 + d3",
    title="Three lines and a feedback matrix",
)
SHARED_GAIN = board(
    "shared_gain",
    "input x; output y; gain g = c*x; delay g1 = g; adder w = g + g1; adder y = w - d*x",
    title="A gain with two readers",
)
NOTCH = board(
    "notch",
    "input hum; output clean; adder clean = hum - c*hum1 + hum2 + rc*clean1 - rr*clean2",
    "delay hum1 = hum; delay hum2 = hum1; delay clean1 = clean; delay clean2 = clean1",
    title="Hum notch",
)
ORDER_4 = board(
    "order_4",
    "input x; output y; adder w = x - a1*w1 - a2*w2 - a3*w3 - a4*w4; delay w1 = w; delay w2 = w1; delay w3 = w2",
    "delay w4 = w3; adder y = b0*w + b1*w1 + b2*w2 + b3*w3 + b4*w4",
    title="Direct form II, order 4",
)
ECHO = board("echo", "input x; output y; delay late = x by 4800; adder y = x + g*late", title="Echo")
DRIFT = board(
    "drift_remover",
    "input level; output slope; delay level1 = level; delay slope1 = slope; adder slope = level - level1 + r*slope1",
    title="Drift remover",
)
LATE = board("late", "input x; delay a = x; delay y0 = a; output y = y0", title="Two samples late")
CASCADE_TDF2 = board(
    "cascade_tdf2",
    "input x; output y; adder v = b01*x + s1; delay s1 = t1; adder t1 = b11*x - a11*v + s2; delay s2 = t2",
    "adder t2 = b21*x - a21*v; adder y = b02*v + p1; delay p1 = q1; adder q1 = b12*v - a12*y + p2; delay p2 = q2",
    "adder q2 = b22*v - a22*y",
    title="Two sections, transposed form II",
)
LONG_NAMES = board(
    "long_names",
    "input embankment_vibration; output alarm_tone_level; delay slow_mean1 = slow_mean",
    "adder slow_mean = smoothing_of_the_mean*embankment_vibration + decay*slow_mean1",
    "adder alarm_tone_level = embankment_vibration - slow_mean",
    title="Alarm tone from the slow mean",
)

BAR = [
    LEAKY, DF1, DF1_ONE_ADDER, DF2, TDF2, fir(8), transposed_fir(8), moving_average(8), RECURSIVE_MEAN, cascade(2),
    cascade_df1(2), ALL_PASS, ALL_POLE_LATTICE, FIR_LATTICE, PARALLEL, STATE_VARIABLE, COMB, PI_LOOP, OSCILLATOR,
    TWO_BY_TWO, MIXER, PID, CIC, LATTICE_LADDER, TWO_LINES, WIRE,
    NOTCH, ORDER_4, ECHO, DRIFT, LATE, CASCADE_TDF2, SHARED_GAIN, LONG_NAMES,
]  # fmt: skip

LEGIBLE = [FOLDED_FIR, MATRIX]
