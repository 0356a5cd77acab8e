"""Estimates the rate of a photoprocess in a black-body field where the fact tables give none.

    python3 tools/make-network/spectra.py /path/to/facts

checks the method against the rows that do have rates in those fields and ends with an error if it
misses the stated agreement. make_network.py asks `Estimate.of` for every light line without a value.

The idea: the photons that drive a process fill a band from the Lyman limit to some wavelength; in
another field its rate scales with the photons in that band, k = k_Draine x photons / Draine photons.
The black bodies are scaled like those of photo_fields.csv: same energy flux as the Draine field
between 91.2 and 200 nm. The end of the band is the ionisation threshold, or follows from the
extinction exponent of the line, which is a measure of the wavelengths that drive it. It never
replaces a rate of the tables. Python 3 standard library only.
"""
import collections
import csv
import math
import os
import sys

EV = 96.485               # kJ/mol per eV
EV_NM = 1239.84198        # photon energy times wavelength, eV nm (CODATA 2018)
HC_OVER_K = 1.438776877e7  # second radiation constant, nm K (CODATA 2018)
LYMAN = 91.2              # nm
SCALE_END = 200.0         # nm, end of the range in which the energy fluxes are made equal
GUESS_END = 250.0         # nm: no band guessed from an exponent reaches further, whatever the exponent says
FIELDS = (("black_body_4000K", 4000.0, "k0_bb4000"), ("black_body_10000K", 10000.0, "k0_bb10000"))

# Dissociation by lines or by a continuum known to be narrower than any rule would say:
# (from nm, to nm, part of the Draine rate). Edges recalled from the laboratory literature; the last item says why.
KNOWN = {
    "H2": ([(LYMAN, 101.0, 1.0)], "Lyman and Werner lines; those of longer wavelength (to 110.8 nm) end in levels that hardly dissociate"),
    "CO": ([(LYMAN, 107.7, 1.0)], "predissociated lines, the last strong band E-X 0-0 at 107.6 nm"),
    "N2": ([(LYMAN, 100.0, 1.0)], "lines between 91 and 100 nm"),
    "O2": ([(127.0, 165.0, 1.0)], "Schumann-Runge continuum, falling steeply beyond 160 nm"),
    "CO2": ([(LYMAN, 122.0, 0.96), (127.0, 158.0, 0.04)], "strong bands below 122 nm; weak continuum of some 5e-19 cm^2 around 147 nm"),
    "NO": ([(LYMAN, 191.6, 1.0)], "predissociated bands up to delta(0-0)"),
}


# ---------------------------------------------------------------- fields, photons cm^-2 s^-1 nm^-1, 4 pi J

def draine(wavelength):
    """Draine 1978 ApJS 36 595 below 200 nm, van Dishoeck & Black 1982 ApJ 258 533 above; wavelength in nm."""
    if wavelength > 200.0:
        return 3.67e4 * wavelength ** 0.7
    E = EV_NM / wavelength
    per_sr_and_ev = 1.658e6 * E - 2.152e5 * E ** 2 + 6.919e3 * E ** 3
    return 4 * math.pi * per_sr_and_ev * E / wavelength     # dE/dlambda = E/lambda


def planck(wavelength, T):
    """Photons of a black body (Planck's law) up to a constant that the scaling takes out; nm, K."""
    return wavelength ** -4.0 / math.expm1(HC_OVER_K / (wavelength * T))


def integral(f, start, end, steps=200):
    """Simpson's rule; `steps` even."""
    h = (end - start) / steps
    inner = sum((4 if i % 2 else 2) * f(start + i * h) for i in range(1, steps))
    return h / 3 * (f(start) + inner + f(end))


def draine_photons(start, end):
    """Split at 200 nm, where the two formulas of the field meet."""
    cut = min(max(start, 200.0), end)
    return sum(integral(draine, a, b) for a, b in ((start, min(cut, end)), (cut, end)) if b > a)


def field_scale(T):
    """Factor on `planck` that gives the energy flux of the Draine field between 91.2 and 200 nm."""
    return (integral(lambda w: draine(w) / w, LYMAN, SCALE_END) /
            integral(lambda w: planck(w, T) / w, LYMAN, SCALE_END))


def band_ratio(T, start, end):
    """Photons of the scaled black body of temperature T (K) per Draine photon between two wavelengths (nm)."""
    return field_scale(T) * integral(lambda w: planck(w, T), start, end) / draine_photons(start, end)


def mean_wavelength(end):
    """Mean wavelength (nm) of the Draine photons between the Lyman limit and `end`."""
    return integral(lambda w: w * draine(w), LYMAN, end) / integral(draine, LYMAN, end)


def band_end(mean):
    """The end (nm) of the band from the Lyman limit whose Draine photons have this mean wavelength (nm)."""
    low, high = LYMAN + 0.1, 900.0
    for _ in range(40):
        middle = (low + high) / 2
        low, high = (middle, high) if mean_wavelength(middle) < mean else (low, middle)
    return low


# ---------------------------------------------------------------- bands of the processes

class Estimate:
    def __init__(self, photo, fields, enthalpy):
        """`enthalpy`: rows by species. 0 K values where given: thresholds are those of cold molecules."""
        self.h = {name: float(r["h0_kJ_mol"] or r["h298_kJ_mol"]) for name, r in enthalpy.items()}
        self.channels = collections.defaultdict(list)
        exponent = {}
        for r in photo:
            self.channels[r["species"], r["process"]].append(r["products"])
            exponent[r["species"], r["process"]] = float(r["gamma"])
        means = collections.defaultdict(list)      # exponent -> mean wavelengths of the processes that have it
        for r in fields:
            which = r["species"], r["process"]
            if which in exponent:
                means[exponent[which]].append(float(r["mean_wavelength_nm"]))
        self.knots = sorted((g, sum(m) / len(m)) for g, m in means.items())

    def driving_wavelength(self, extinction):
        """Rate-weighted mean wavelength (nm) that belongs to an extinction exponent, interpolated in the fact tables."""
        if extinction <= self.knots[0][0]:
            return self.knots[0][1]
        for (g0, w0), (g1, w1) in zip(self.knots, self.knots[1:]):
            if extinction <= g1:
                return w0 + (w1 - w0) * (extinction - g0) / (g1 - g0)
        return self.knots[-1][1]

    def limit(self, species, process):
        """Wavelength (nm) of the least energy that opens a channel; None where every channel is exothermic."""
        needed = min(sum(self.h[p] for p in products.split(" + ")) for products in self.channels[species, process])
        energy = (needed - self.h[species]) / EV
        return EV_NM / energy if energy > 0 else None

    def bands(self, species, process, extinction):
        """[(from nm, to nm, part of the Draine rate)]"""
        if process == "ionisation":
            return [(LYMAN, max(self.limit(species, process), LYMAN + 0.5), 1.0)]
        if species in KNOWN:
            return KNOWN[species][0]
        end = min(band_end(self.driving_wavelength(extinction)), self.limit(species, process) or GUESS_END, GUESS_END)
        return [(LYMAN, end, 1.0)]

    def of(self, species, process, extinction):
        """Ratio to the Draine rate per field, and the words for the note."""
        bands = self.bands(species, process, extinction)
        ratios = [(name, sum(part * band_ratio(T, a, b) for a, b, part in bands)) for name, T, _ in FIELDS]
        words = " and ".join("%.4g-%.4g nm" % (a, b) + (" (%g)" % part if part < 1 else "") for a, b, part in bands)
        return ratios, "spectra estimated from band " + words


# ---------------------------------------------------------------- the check

def check(folder):
    def table(name):
        with open(os.path.join(folder, name), encoding="utf8", newline="") as f:
            return list(csv.DictReader(line for line in f if not line.startswith("#")))
    photo, fields = table("photo.csv"), table("photo_fields.csv")
    estimate = Estimate(photo, fields, {r["species"]: r for r in table("enthalpy.csv")})
    exponent = {(r["species"], r["process"]): float(r["gamma"]) for r in photo}
    errors = collections.defaultdict(list)         # (kind, field) -> log10(estimate / table)
    print("Draine photons 91.2-205 nm: %.4g cm^-2 s^-1 (1.928e8 in disk_relations.md)" % draine_photons(LYMAN, 205.0))
    print("estimate / table per process: band, at 4000 K, at 10000 K")
    for r in fields:
        which = r["species"], r["process"]
        if which not in exponent:
            continue
        kind = [which[1] if "+" not in which[0] else "dissociation of ions"]
        if kind[0] == "dissociation" and 2.0 <= exponent[which] <= 2.6:
            kind.append("dissociation, exponent 2.0-2.6")
        ratios, words = estimate.of(*which, exponent[which])
        found = [ratio * float(r["k0_draine"]) / float(r[column]) for (_, ratio), (_, _, column) in zip(ratios, FIELDS)]
        for k in kind:
            for (name, _), factor in zip(ratios, found):
                errors[k, name].append(math.log10(factor))
        print("  %-8s %-12s %-13s %8.3g %8.3g" % (*which, words.split("band ")[1], *found))
    bad = []
    # A row's exponent was fitted to its own mean wavelength: this checks the band idea, not the exponents.
    # The most the typical (root mean square) factor may be, rounded up from what the check gave when it was written.
    allowed = {("ionisation", "black_body_4000K"): 2.4, ("ionisation", "black_body_10000K"): 1.3,
               ("dissociation, exponent 2.0-2.6", "black_body_4000K"): 5.5,
               ("dissociation, exponent 2.0-2.6", "black_body_10000K"): 1.3}
    for key, logs in sorted(errors.items()):
        logs.sort()
        typical = 10 ** math.sqrt(sum(x * x for x in logs) / len(logs))
        within = sum(abs(x) < math.log10(3) for x in logs)
        print("%-31s %-18s median %.2f, typical factor %.2f, worst %.3g / %.3g, within 3: %d of %d" % (
            *key, 10 ** logs[len(logs) // 2], typical, 10 ** logs[0], 10 ** logs[-1], within, len(logs)))
        if typical > allowed.get(key, math.inf):
            bad.append("%s in %s: typical factor %.2f, allowed %.2f" % (*key, typical, allowed[key]))
    if abs(draine_photons(LYMAN, 205.0) / 1.928e8 - 1) > 1e-3:
        bad.append("photon flux of the Draine field")
    if bad:
        raise SystemExit("NOT as stated: " + "; ".join(bad))


if __name__ == "__main__":
    if len(sys.argv) != 2:
        raise SystemExit(__doc__)
    check(sys.argv[1])
