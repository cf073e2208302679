#!/usr/bin/env python3
# The peer of `foundleft assess` and `foundleft certify`: what a competent person would write in a general-purpose
# language, with numpy and reportlab, to get from the same journal to the same figures and a page like ours.
# SPDX-License-Identifier: GPL-3.0-or-later
#
# Use: peer_main_job.py JOURNAL FACES-FOLDER OUT.pdf                  prints the results, writes the pages
#      peer_main_job.py JOURNAL FACES-FOLDER OUT.pdf --compare JSON   also holds them against `assess --json`
#
# The same: verified digest chain; ASTM D341 with its low-viscosity term between the enclosing certified temperatures;
# density; equivalent viscosity; errors; means by direction and of both; budget, Welch-Satterthwaite, Student's t;
# least-squares line, the three linearities; hysteresis, repeatability; verdicts by the four states. Tables of both
# runs, of the lines and of the certificates, the error chart, an embedded face.
# Left out, all in its favour: PDF/A, the capillary check, plausibility of stock and procedure, the order of work, other
# dials, signals and rules, UTF-8 and coverage checks, the drawn curve in the terminal, durable writing.
import datetime
import hashlib
import itertools
import json
import math
import re
import statistics
import sys

import numpy as np
from reportlab.graphics.shapes import Drawing, Line, Polygon, PolyLine, Rect, String
from reportlab.lib import colors
from reportlab.lib.pagesizes import A4
from reportlab.lib.styles import ParagraphStyle
from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont
from reportlab.platypus import PageBreak, Paragraph, SimpleDocTemplate, Spacer, Table, TableStyle

LOW_TERMS = np.array([(1, -1.14883, 2.65868), (-1, -0.0038138, 12.5645), (1, 5.46491, 37.6289),
                      (-1, 13.0458, 74.6851), (1, 37.4619, 192.643), (-1, 80.4945, 400.468)])
COVERAGE = 0.9545
SQRT3 = math.sqrt(3)


# ---- the journal ----------------------------------------------------------------------------------------------------

def read_journal(path):
    events, prev = [], "0" * 64
    with open(path, "rb") as file:
        for line in file.read().split(b"\n")[:-1]:
            body, own = line.rsplit(b"\tself=", 1)
            if hashlib.sha256(body).hexdigest() != own.decode() or body.rsplit(b"\tprev=", 1)[1].decode() != prev:
                sys.exit(f"{path}: the chain breaks")
            prev = own.decode()
            parts = body.decode("utf-8").split("\t")
            event = dict(part.split("=", 1) for part in parts[3:])
            event.update(at=parts[1], verb=parts[2])
            events.append(event)
    return events, prev


def yaml_fields(body):
    """The plain fields of a text, and the rows of its table; enough for what the journal holds."""
    body = body.replace("\\n", "\n")
    fields = {key.strip(): value.split(" #")[0].strip() for key, value in re.findall(r"^ *([\w ]+): +(.+)$", body, re.M)}
    rows = [dict(part.split(": ", 1) for part in row.split(", ")) for row in re.findall(r"\{(at: .*?)\}", body)]
    return fields, rows


def first_number(text):
    return float(re.match(r"[-+0-9.]+", text).group())


def day(text):
    return datetime.date.fromisoformat(text)


# ---- physics --------------------------------------------------------------------------------------------------------

def z_of(nu):
    sign, p, q = LOW_TERMS.T[:, :, None]
    return nu + 0.7 + (sign * np.exp(p - q * nu)).sum(axis=0)


def dz_of(nu):
    sign, p, q = LOW_TERMS.T[:, :, None]
    return 1 - (sign * q * np.exp(p - q * nu)).sum(axis=0)


class Oil:
    def __init__(self, body):
        fields, rows = yaml_fields(body)
        self.fields, self.name, self.lot, self.k = fields, fields["name"], fields["lot"], float(fields["k"])
        self.t, self.nu, self.u_nu, self.rho, self.u_rho = (np.array([first_number(row[key]) for row in rows])
                                                            for key in ("at", "nu", "U", "density", "U density"))
        self.ln_t = np.log(self.t + 273.15)
        self.w = np.log10(np.log10(z_of(self.nu)))
        inner = [self.at(np.array([self.t[i]]), i - 1, i + 1)[0][0] / self.nu[i] - 1 for i in range(1, len(rows) - 1)]
        self.misfit = max(map(abs, inner))

    def at(self, t, low, high):
        """nu, rho, d ln nu / dT, d rho / dT and the two shares of the certificate at temperatures t."""
        lt = np.log10(t + 273.15)
        l1, l2 = np.log10(self.t[low] + 273.15), np.log10(self.t[high] + 273.15)
        b = (self.w[low] - self.w[high]) / (l2 - l1)
        z = 10 ** (10 ** (self.w[low] + b * l1 - b * lt))
        nu = np.maximum(z - 0.7, 0.21)
        for _ in range(50):
            step = (z_of(nu) - z) / dz_of(nu)
            nu = nu - step
            if np.all(np.abs(step) < 1e-15 * nu):
                break
        g, (g1, g2) = z * np.log(z) / dz_of(nu), (lambda n: z_of(n) * np.log(z_of(n)) / dz_of(n))(self.nu[[low, high]])
        beta = b * g / ((t + 273.15) * nu)
        way = (lt - l1) / (l2 - l1)
        share = (t - self.t[low]) / (self.t[high] - self.t[low])
        slope = (self.rho[high] - self.rho[low]) / (self.t[high] - self.t[low])
        return (nu, self.rho[low] + slope * (t - self.t[low]), beta, slope,
                (1 - way) * g * self.nu[low] / (g1 * nu), way * g * self.nu[high] / (g2 * nu),
                (1 - share) * self.u_rho[low] + share * self.u_rho[high])

    def bracket(self, t):
        low = min(max(int(np.searchsorted(self.t, t, side="right")) - 1, 0), len(self.t) - 2)
        return low, low + 1


# ---- statistics -----------------------------------------------------------------------------------------------------

def incomplete_beta(a, b, x):
    """Regularised, by its continued fraction (Lentz)."""
    if x > (a + 1) / (a + b + 2):
        return 1 - incomplete_beta(b, a, 1 - x)
    front = math.exp(math.lgamma(a + b) - math.lgamma(a) - math.lgamma(b) + a * math.log(x) + b * math.log1p(-x)) / a
    c, d, f = 1.0, 0.0, 1.0
    for i in range(400):
        m = i // 2
        n = 1.0 if i == 0 else (m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m)) if i % 2 == 0 else
                                -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1)))
        d = 1 / (1 + n * d)
        c = 1 + n / c
        f *= c * d
        if abs(1 - c * d) < 1e-15:
            break
    return front * (f - 1)


def student(probability, dof):
    normal = statistics.NormalDist().inv_cdf((1 + probability) / 2)
    if dof > 1e12:
        return normal
    t = normal
    for _ in range(60):  # Newton on the two-sided probability
        p = 1 - incomplete_beta(dof / 2, 0.5, dof / (dof + t * t))
        density = 2 * math.exp(math.lgamma((dof + 1) / 2) - math.lgamma(dof / 2) - 0.5 * math.log(dof * math.pi)
                               - (dof + 1) / 2 * math.log1p(t * t / dof))
        step = (p - probability) / density
        t -= step
        if abs(step) < 1e-12 * t:
            break
    return t


def expanded(terms):
    """(u in % of span, dof) of independent terms -> uc, k, U."""
    u = np.array([term[0] for term in terms])
    uc = math.sqrt(float((u * u).sum()))
    below = sum((term[0] / uc) ** 4 / term[1] for term in terms if term[1])
    dof = 1 / below if below else math.inf
    k = student(COVERAGE, max(1, math.floor(dof * (1 + 16 * 2.2e-16))) if below else math.inf)
    return uc, k, k * uc


def deviation_of_best_line(x, y):
    best = math.inf
    for low, mid, high in itertools.permutations(range(len(x)), 3):
        if x[low] < x[high]:
            slope = (y[high] - y[low]) / (x[high] - x[low])
            middle = y[low] + slope * (x[mid] - x[low])
            best = min(best, np.abs(y - (y[low] + (y[mid] - middle) / 2 + slope * (x - x[low]))).max())
    return best


def deviation_from_zero_based(x, y):
    """Line through the first point with the smallest largest deviation: some pair of points has equal, opposite ones."""
    dx, dy = x - x[0], y - y[0]
    slopes = [dy[i] / dx[i] for i in range(1, len(x))]
    slopes += [(dy[i] + dy[j]) / (dx[i] + dx[j]) for i in range(1, len(x)) for j in range(i)]
    return min(np.abs(dy - slope * dx).max() for slope in slopes)


# ---- the result -----------------------------------------------------------------------------------------------------

class Session:
    def __init__(self, path):
        events, self.digest = read_journal(path)
        texts = {(e["kind"], e["name"]): e["body"] for e in events if e["verb"] == "text"}
        self.sets = {e["id"]: e["typed"] for e in events if e["verb"] == "set"}
        self.gates = [(e["id"], e["answer"], e["at"]) for e in events if e["verb"] == "gate"]
        self.adjustments = [(e["item"], e["before"], e["after"], e["at"]) for e in events if e["verb"] == "adjust"]
        self.decision = next(e for e in events if e["verb"] == "decide")
        self.remarks = [e["typed"] for e in events if e["verb"] == "remark"]
        self.day = day(events[0]["day"])
        self.closed_by = next(e["by"] for e in events if e["verb"] == "close")
        self.oils = {int(e["point"]): Oil(texts["oil", e["lot"]]) for e in events if e["verb"] == "point"}
        self.tools = {e["role"]: yaml_fields(texts["equipment", e["id"]])[0] for e in events if e["verb"] == "equip"}
        self.unit = yaml_fields(next(body for (kind, _), body in texts.items() if kind == "instrument"))[0]
        self.procedure = yaml_fields(next(body for (kind, _), body in texts.items() if kind == "procedure"))[0]
        self.full = float(re.search(r"to ([0-9.]+)", self.unit["dial"]).group(1))
        self.density = first_number(self.unit["dial density"])
        self.tolerance = first_number(self.unit["tolerance"])
        self.runs = {}
        for e in events:
            if e["verb"] == "read":
                self.runs.setdefault(e["run"], []).append(
                    (0 if e["point"] == "zero" else int(e["point"]), e["pass"], int(e["cycle"]), float(e["value"]),
                     float(e.get("temp-c", "nan"))))


def tool_terms(tool, per_unit, on):
    years = max(0, (on - day(tool["calibrated on"])).days) / 365.25
    return [(per_unit * first_number(tool["U"]) / float(tool["k"]), 0),
            (per_unit * first_number(tool["drift per year"]) * years / SQRT3, 0),
            (per_unit * first_number(tool["resolution"]) / 2 / SQRT3, 0)]


def budget(session, point, n, s, temp, equivalent, hysteresis=None, weight=1.0):
    terms, own = [], 0.0
    meter = session.tools["current-meter"]
    own = first_number(meter["U"]) / 16 * 100
    if point:
        oil = session.oils[point]
        low, high = oil.bracket(temp)
        nu, rho, beta, slope, c1, c2, u_rho = (float(np.squeeze(v)) for v in oil.at(np.array([temp]), low, high))
        g = equivalent / session.full
        certified = abs(c1 * oil.u_nu[low] + c2 * oil.u_nu[high])
        half = max(first_number(session.procedure["oil interpolation"]), 100 * oil.misfit)
        years = (session.day - day(oil.fields["certified on"])).days / 365.25
        terms += [(g * certified / oil.k, 0), (g * half / SQRT3, 0),
                  (g * first_number(session.procedure["oil ageing per year"]) * years / SQRT3, 0)]
        per_kelvin = 100 * g * abs(beta + -slope / rho)
        terms += tool_terms(session.tools["thermometer"], per_kelvin, session.day)
        terms += [(per_kelvin * first_number(session.tools["bath"]["uniformity"]) / SQRT3, 0),
                  (100 * g / rho * u_rho / oil.k, 0)]
        own = g * certified
    terms += tool_terms(meter, 100 / 16, session.day)
    terms.append((s * weight, n))
    if hysteresis is not None and point:
        terms.append((abs(hysteresis) / 2 / SQRT3, 0))
    uc, k, big = expanded(terms)
    return {"u": uc, "k": k, "U": max(big, own)}


def verdict(error, U, tolerance):
    size = abs(error)
    return ("pass" if size <= tolerance - U else "conditional pass" if size <= tolerance else
            "conditional fail" if size <= tolerance + U else "fail")


def state_at(session, point, temp):
    if not point:
        return 0.0, float("nan"), float("nan")
    oil = session.oils[point]
    nu, rho = oil.at(np.array([temp]), *oil.bracket(temp))[:2]
    return float(nu[0] * rho[0] / session.density), float(nu[0]), float(rho[0])


def finish(session, row, s, n_dof, hysteresis=None, weight=1.0):
    row["certified"], row["rho"] = state_at(session, row["point"], row["temp"])[1:]
    row.update(budget(session, row["point"], n_dof, s, row["temp"], row["equivalent"], hysteresis, weight))
    row["verdict"] = verdict(row["error"], row["U"], session.tolerance)
    return row


def assess_run(session, readings):
    table = np.array([(p, c, out, t) for p, _, c, out, t in readings])
    rising = np.array([r[1] == "rising" for r in readings])
    equivalent = np.zeros(len(table))
    for point, oil in session.oils.items():
        here = table[:, 0] == point
        lows = np.array([oil.bracket(t)[0] for t in table[here, 3]])
        values = np.empty(len(lows))
        for low in set(lows.tolist()):
            nu, rho = oil.at(table[here, 3][lows == low], low, low + 1)[:2]
            values[lows == low] = nu * rho / session.density
        equivalent[here] = values
    error = ((table[:, 2] - 4) / 16 - equivalent / session.full) * 100
    run = {"points": [], "combined": [], "hysteresis": {}, "range": [], "s": [], "in_cycle": []}
    for point in range(len(session.oils) + 1):
        pair, means = [], []
        for up in (True, False):
            here = (table[:, 0] == point) & (rising == up)
            e = error[here]
            s = float(e.std(ddof=1))
            by_cycle = np.array([e[table[here, 1] == c].mean() for c in np.unique(table[here, 1])])
            run["range"].append(float(np.ptp(by_cycle)))
            run["s"].append(s)
            means.append(by_cycle)
            pair.append(finish(session, {
                "point": point, "up": up, "n": len(e), "temp": float(table[here, 3].mean()), "s": s,
                "equivalent": float(equivalent[here].mean()), "error": float(e.mean()),
                "found": float(table[here, 2].mean())}, s, len(e) - 1, weight=1 / math.sqrt(len(e))))
        hysteresis = pair[1]["error"] - pair[0]["error"]
        run["hysteresis"][point] = hysteresis
        run["in_cycle"].append(float(np.abs(means[1] - means[0]).max()))
        both = {key: (pair[0][key] + pair[1][key]) / 2 for key in ("temp", "equivalent", "error", "found")}
        both.update(point=point, up=None, n=pair[0]["n"] + pair[1]["n"])
        dof = both["n"] - 2
        s = math.sqrt(sum((p["n"] - 1) * p["s"] ** 2 for p in pair) / dof)
        weight = 0.5 * math.sqrt(sum(1 / p["n"] for p in pair))
        run["points"] += pair
        run["combined"].append(finish(session, both, s, dof, hysteresis, weight))
    x = np.array([p["equivalent"] for p in run["points"] if p["up"]]) / session.full
    y = np.array([p["error"] for p in run["combined"]])
    design = np.vander(x, 2, increasing=True)
    line, residual, _, _ = np.linalg.lstsq(design, y, rcond=None)
    covariance = np.linalg.inv(design.T @ design) * residual[0] / (len(x) - 2)
    ends = y - (y[0] + (y[-1] - y[0]) / (x[-1] - x[0]) * (x - x[0]))
    run.update(zero=float(line[0]), span=float(line[1]), u_zero=math.sqrt(covariance[0, 0]),
               u_span=math.sqrt(covariance[1, 1]), independent=float(deviation_of_best_line(x, y)),
               terminal=float(np.abs(ends).max()), zero_based=float(deviation_from_zero_based(x, y)),
               largest_hysteresis=max(map(abs, run["hysteresis"].values())), repeatability=max(run["range"]),
               running=float(np.polyfit(x[1:], y[1:], 1)[1]), lowest=float(error.min()), highest=float(error.max()),
               worst_in_cycle=max(run["in_cycle"]))
    rank = ("pass", "conditional pass", "conditional fail", "fail")
    run["verdict"] = max((p["verdict"] for p in run["points"]), key=rank.index)
    return run


def compare(runs, path):
    """The figures of both, to 1e-7 of a percent of span: D341's inverse and the quantile are iterated in both."""
    with open(path, encoding="utf-8") as file:
        ours = {run["kind"]: run for run in json.load(file)["runs"]}
    worst = 0.0
    for kind, run in runs.items():
        theirs = ours[kind]
        pairs = [(run[a], theirs[b + "_pct_span"]) for a, b in
                 (("zero", "zero_error"), ("span", "span_error"), ("independent", "independent_linearity"),
                  ("terminal", "terminal_linearity"), ("zero_based", "zero_based_linearity"),
                  ("largest_hysteresis", "hysteresis"), ("repeatability", "repeatability"),
                  ("running", "running_zero"), ("lowest", "reading_error_low"), ("highest", "reading_error_high"),
                  ("worst_in_cycle", "hysteresis_single_cycle"))]
        for mine, other in list(zip(run["points"], theirs["points"])) + list(zip(run["combined"], theirs["combined"])):
            pairs += [(mine["error"], other["error_pct_span"]), (mine["U"], other["expanded_uncertainty_pct_span"]),
                      (mine["k"], other["coverage_factor"]), (mine["equivalent"], other["equivalent_mm2_s"])]
            if mine["verdict"] != other["verdict"]:
                sys.exit(f"{kind}: verdict {mine['verdict']} here, {other['verdict']} there")
        if run["verdict"] != theirs["verdict"] or len(run["points"]) != len(theirs["points"]):
            sys.exit(f"{kind}: not the same verdict or number of points")
        worst = max([worst] + [abs(a - b) for a, b in pairs])
    if not worst < 1e-7:
        sys.exit(f"the figures differ by {worst}")
    print(f"figures agree with assess --json to {worst:.1e}", file=sys.stderr)


# ---- the pages ------------------------------------------------------------------------------------------------------

TEXT = ParagraphStyle("text", fontName="Face", fontSize=8, leading=10.5, spaceAfter=4)
HEAD = ParagraphStyle("head", fontName="Bold", fontSize=10, leading=14, spaceBefore=8, spaceAfter=3)
TITLE = ParagraphStyle("title", fontName="Bold", fontSize=20, leading=26)
PLAIN = TableStyle([("FONT", (0, 0), (-1, -1), "Face", 7.5), ("FONT", (0, 0), (-1, 0), "Bold", 7.5),
                    ("LINEBELOW", (0, 0), (-1, 0), 0.5, colors.black), ("ALIGN", (2, 0), (-2, -1), "RIGHT"),
                    ("LINEBELOW", (0, -1), (-1, -1), 0.5, colors.black),
                    ("TOPPADDING", (0, 0), (-1, -1), 1), ("BOTTOMPADDING", (0, 0), (-1, -1), 1.5)])


def point_rows(session, run):
    yield ("oil, lot", "direction", "T, °C", "ν, mm²/s", "ρ, kg/m³", "equiv., mm²/s", "n", "ideal, mA", "found, mA",
           "error, % span", "error, mm²/s", "U, % span", "U, mm²/s", "k", "verdict")
    for i, both in enumerate(run["combined"]):
        for p in run["points"][2 * i:2 * i + 2] + [both]:
            oil = session.oils.get(p["point"])
            known = oil is not None
            yield (f"{oil.name} {oil.lot}" if known else "zero, stopped",
                   "both" if p["up"] is None else "rising" if p["up"] else "falling",
                   f"{p['temp']:.2f}" if known else "", f"{p['certified']:.3f}" if known else "",
                   f"{p['rho']:.1f}" if known else "", f"{p['equivalent']:.3f}" if known else "", p["n"],
                   f"{4 + 16 * p['equivalent'] / session.full:.3f}", f"{p['found']:.3f}", f"{p['error']:+.3f}",
                   f"{p['error'] / 100 * session.full:+.3f}", f"{p['U']:.2g}", f"{p['U'] / 100 * session.full:.2g}",
                   f"{p['k']:.2f}", p["verdict"])


def line_rows(runs):
    yield ("% of span", *runs)
    for words, key in (("zero error, least-squares line", "zero"), ("standard uncertainty", "u_zero"),
                       ("span error, least-squares line", "span"), ("standard uncertainty", "u_span"),
                       ("running zero", "running"), ("highest error of a reading", "highest"),
                       ("lowest error of a reading", "lowest"), ("linearity, independent", "independent"),
                       ("linearity, terminal-based", "terminal"), ("linearity, zero-based", "zero_based"),
                       ("hysteresis, largest", "largest_hysteresis"), ("hysteresis within a cycle", "worst_in_cycle"),
                       ("repeatability, largest", "repeatability")):
        yield (words, *(f"{run[key]:.3f}" for run in runs.values()))


def chart(session, runs):
    width, height, left, bottom = 490, 170, 25, 20
    low, high = -3.0, 3.5
    drawing = Drawing(width, height)
    def px(x):
        return left + (width - left) * x / session.full
    def py(y):
        return bottom + (height - bottom) * (y - low) / (high - low)
    drawing.add(Rect(left, py(-session.tolerance), width - left, py(session.tolerance) - py(-session.tolerance),
                     fillColor=colors.Color(0.92, 0.92, 0.92), strokeColor=None))
    worst = [max(run["combined"][i]["U"] for run in runs.values()) for i in range(len(session.oils) + 1)]
    places = [next(iter(runs.values()))["combined"][i]["equivalent"] for i in range(len(session.oils) + 1)]
    for sign in (1, -1):
        drawing.add(PolyLine([v for x, u in zip(places, worst) for v in (px(x), py(sign * (session.tolerance - u)))],
                             strokeWidth=0.5, strokeColor=colors.grey))
    for tick in range(-3, 4):
        drawing.add(Line(left, py(tick), width, py(tick), strokeWidth=0.9 if tick == 0 else 0.2))
        drawing.add(String(left - 4, py(tick) - 2.5, f"{tick:+d}", fontName="Face", fontSize=7, textAnchor="end"))
    for tick in range(0, int(session.full) + 1, 5):
        drawing.add(Line(px(tick), bottom - 3, px(tick), bottom, strokeWidth=0.4))
        drawing.add(String(px(tick), bottom - 11, str(tick), fontName="Face", fontSize=7, textAnchor="middle"))
    for run, fill in zip(runs.values(), (colors.white, colors.black)):
        for p in run["points"]:
            x, y, d = px(p["equivalent"]) + (-3 if p["up"] else 3), py(p["error"]), 3 if p["up"] else -3
            drawing.add(Line(x, py(p["error"] - p["U"]), x, py(p["error"] + p["U"]), strokeWidth=0.6))
            drawing.add(Polygon([x - 3, y - d, x + 3, y - d, x, y + d], fillColor=fill, strokeWidth=0.6))
    return drawing


def facts(rows):
    return Table([[Paragraph(str(cell), TEXT) for cell in row] for row in rows], colWidths=(90, 155, 90, 155),
                 style=TableStyle([("VALIGN", (0, 0), (-1, -1), "TOP"), ("TOPPADDING", (0, 0), (-1, -1), 0),
                                   ("BOTTOMPADDING", (0, 0), (-1, -1), 0)]))


def story(session, runs):
    unit = session.unit
    yield Paragraph("Calibration certificate", TITLE)
    yield Paragraph(f"Capillary viscosity sensor {unit['tag']}, serial number {unit['serial']}", HEAD)
    yield facts([("Plate", unit["maker plate"], "Customer", session.sets["customer"]),
                 ("Owner", unit["owner"], "Order", session.sets["job"]),
                 ("Site", unit["site"], "Place", session.sets["place"]),
                 ("Position", unit["position"], "Calibrated", session.day),
                 ("Dial", unit["dial"], "Procedure", session.procedure["id"]),
                 ("Dial density", unit["dial density"], "Present", session.sets["others"]),
                 ("Signal", unit["signal"], "Performed by", session.closed_by)])
    yield Paragraph(f"Method. {session.procedure.get('method', '')} Each oil is compared by its equivalent viscosity: "
                    "its dynamic viscosity divided by the dial density.", TEXT)
    yield Paragraph("Outcome", HEAD)
    for kind, run in runs.items():
        worst = max(run["points"], key=lambda p: abs(p["error"]) + p["U"])
        yield Paragraph(f"{kind}: {run['verdict']}. Worst point: error {worst['error']:+.2f} % of span, "
                        f"U = {worst['U']:.2f} % of span (k = {worst['k']:.2f}), tolerance ±{session.tolerance} %.", TEXT)
    yield Paragraph(f"Decision: {session.decision['answer']}, {session.decision['reason']}. By {session.decision['by']}.",
                    TEXT)
    yield Table([("adjustment", "before", "after", "time")] + session.adjustments, style=PLAIN, hAlign="LEFT")
    yield Paragraph("Errors over the scale, mean error in % of span", HEAD)
    yield chart(session, runs)
    yield PageBreak()
    for kind, run in runs.items():
        yield Paragraph(f"{kind} results", HEAD)
        yield Table(list(point_rows(session, run)), style=PLAIN, hAlign="LEFT")
    yield Paragraph("Zero, span, linearity, hysteresis, repeatability", HEAD)
    yield Table(list(line_rows(runs)), style=PLAIN, hAlign="LEFT")
    yield PageBreak()
    yield Paragraph("Traceability", HEAD)
    yield Table([("use", "certificate", "issued by", "calibrated", "due", "U", "k")] +
                [(role, t["certificate"], t["issuer"], t["calibrated on"], t["due on"], t.get("U", t.get("uniformity")),
                  t.get("k", "")) for role, t in session.tools.items()], style=PLAIN, hAlign="LEFT")
    yield Spacer(1, 8)
    yield Table([("oil", "lot", "certificate", "ν at 40 °C", "certified", "use before", "opened")] +
                [(o.name, o.lot, o.fields["certificate"], f"{np.interp(40, o.t, o.nu):.3f}", o.fields["certified on"],
                  o.fields["use before"], o.fields["opened on"]) for o in session.oils.values()],
                style=PLAIN, hAlign="LEFT")
    yield Paragraph("Conditions, safety, return to service, remarks", HEAD)
    yield Paragraph("; ".join(f"{name}: {value}" for name, value in session.sets.items()), TEXT)
    yield Paragraph("; ".join(f"{name}: {answer} ({at[11:16]})" for name, answer, at in session.gates), TEXT)
    for remark in session.remarks:
        yield Paragraph(remark, TEXT)
    yield Paragraph(f"Digest of the journal (SHA-256): {session.digest}", TEXT)


def main():
    journal, faces, out = sys.argv[1:4]
    session = Session(journal)
    runs = {kind: assess_run(session, readings) for kind, readings in session.runs.items()}
    if sys.argv[4:5] == ["--compare"]:
        compare(runs, sys.argv[5])
    for kind, run in runs.items():
        print(kind, run["verdict"])
        for row in point_rows(session, run):
            print("  ".join(f"{cell!s:>10}" for cell in row))
    for row in line_rows(runs):
        print("  ".join(f"{cell!s:>32}" for cell in row))
    pdfmetrics.registerFont(TTFont("Face", f"{faces}/regular.ttf"))
    pdfmetrics.registerFont(TTFont("Bold", f"{faces}/bold.ttf"))
    def foot(canvas, _):
        canvas.setFont("Face", 7)
        canvas.drawRightString(545, 30, f"page {canvas.getPageNumber()}")
    SimpleDocTemplate(out, pagesize=A4, leftMargin=51, rightMargin=40, topMargin=45, bottomMargin=45,
                      title="Calibration certificate").build(list(story(session, runs)), onFirstPage=foot,
                                                             onLaterPages=foot)


main()
