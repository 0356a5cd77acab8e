"""Turns the reference strings of the fact tables into short source keys and full citations.

Used by make_network.py only. A key is built from the authors and years found in the string
(`anicich1993+mcewan2007`); short forms such as `McEwan 2007` are written out from references.csv.
Every reference string ends up whole in the text of exactly one key: no citation is dropped.
"""
import collections
import re
import unicodedata

YEAR = re.compile(r"(?<![\d.])((?:18|19|20)\d\d)([a-z]?)(?!\w)")
# A page number that looks like a year, and letters before one: never the year of a citation.
NOT_A_YEAR = re.compile(r"\b57 2053\b|NASA/TP-2002-211556|doi:\S+|\bRSC Adv\. 4 \d+")

# Citations that no table row spells out in a form of its own.
FIXED = {
    "draine1996": "Draine & Bertoldi 1996 ApJ 468 269, eq. 37",
    "visser2009": "Visser, van Dishoeck & Black 2009 A&A 503 323",
    "kamp2000+tielens1985": "Kamp & Bertoldi 2000 A&A 353 276; Tielens & Hollenbach 1985 ApJ 291 722 (recalled)",
    "graedel1982+lee1998": "Graedel, Langer & Frerking 1982 ApJS 48 321; Lee et al. 1998 A&A 334 1047 (recalled)",
    "oberg2011": "Oberg et al. 2011 ApJ 740 109 (low-mass protostar medians)",
    "jura1975": "Jura 1975 ApJ 197 575",
    "pernot-ion-data": "Open kinetics data set for planetary ion chemistry of P. Pernot and co-workers, version 1.4, Zenodo, "
                       "licence CeCILL v2.1: collection from which most ion-neutral, recombination and low-temperature "
                       "neutral values were read",
}
# Strings without a year that deserve a better key than their own words.
NAMED = {
    "Active Thermochemical Tables v1.112 (Ruscic et al.)": "atct1.112",
    "recalled": "recalled-enthalpy",
    "estimated": "estimated-enthalpy",
    "customary default": "customary-photodesorption",
    "gas-phase value": "gas-phase-barrier",
    "same study as the other channels of this pair": "study-not-recovered",
    "recalled, 354-370": "recalled-enthalpy-range",
    "McBride, Zehe & Gordon 2002 NASA/TP-2002-211556": "mcbride2002",
    "estimate (theory, capture or analogy) of the planetary neutral data set": "planetary-neutral-estimate",
    "detailed balance from: estimate (theory, capture or analogy) of the planetary neutral data set": "planetary-neutral-estimate-reverse",
    "compiled value, primary source not recovered": "compiled-source-not-recovered",
    "McBride, Zehe & Gordon 2002 NASA/TP-2002-211556 (minus 6.197 kJ/mol to the stationary-electron convention)":
        "mcbride2002-stationary-electron",
    "own integration of the cross sections of Heays, Bosman & van Dishoeck 2017 A&A 602 A105": "heays2017-integrated",
    "own integration of the Heays et al. 2017 A&A 602 A105 cross sections over the H2 emission spectrum":
        "heays2017-integrated-h2-emission",
    "Heays et al. 2017 A&A 602 A105 Table 19": "heays2017-table19",
    "Heays et al. 2017 A&A 602 A105, tabulated value recalled": "heays2017-recalled",
    "Visser, van Dishoeck & Black 2009 A&A 503 323": "visser2009",
    "Garland 1998 doi:10.1002/kin.550270108": "garland1998-doi",
    "Herron 1991 doi:10.1021/j100330a028": "herron1991-doi",
    "Le Picard et al. 2001 A & A 372 1064": "lepicard2001-aa372",
    "Geppert 2006 (total 8.9e-7; BR 0.51); Geppert 2006": "geppert2006-br-0.51",
    "Ocana et al. 2017 ApJ 850 28 (1.2e-10 at 22 K, 2.1e-11 at 107 K, 2.6e-10 extrapolated to 10 K; own power law, "
    "joins the 300 K value)": "ocana2017-below-300k",
    "computed here from the sublimation pressure (Landolt-Boernstein sublimation constants (chemicals package))":
        "sublimation-landolt-boernstein",
    "computed here from the sublimation pressure (triple point 0.186 Pa at 175.6 K (liquid correlation gives 0.176))":
        "sublimation-ch3oh-triple-point",
    "no direct measurement agreed; 1e-4 to 1e-3": "no-agreed-measurement",
}
TEXT = {
    "same study as the other channels of this pair": "one study for all channels of the pair, citation not recovered",
    "recalled": "enthalpy recalled, source not recovered",
    "recalled, 354-370": "enthalpy recalled, values between 354 and 370 kJ/mol in use",
    "estimated": "enthalpy estimated",
    "customary default": "customary default of 1e-3 molecules per photon where nothing is measured, estimated within a factor 10",
}


def ascii_only(text):
    return "".join(c for c in unicodedata.normalize("NFKD", text) if not unicodedata.combining(c))


def slug(text, words=6, numbers=False):
    found = re.findall(r"[a-z0-9.]*[a-z0-9]", ascii_only(text).lower().replace("'", ""))
    found = [w for w in found if w not in ("the", "of", "a", "et", "al") and (numbers or not w[0].isdigit())]
    return "-".join(found[:words])


def citations(text):
    """(key, start, end) of every author-year citation in the text, in order."""
    hidden = NOT_A_YEAR.sub(lambda m: "#" * len(m.group()), text)
    found, previous, author = [], 0, None
    for m in YEAR.finditer(hidden):
        chunk = hidden[previous:m.start()]
        cut = max((x.end() for x in re.finditer(r"[;/(:#]|\d|from: |branching ", chunk)), default=0)
        name = re.search(r"\b(Le |de )?([A-Z][\w'’-]+)", chunk[cut:])
        start = m.start()
        if name:
            author = re.sub(r"[^a-z]", "", ascii_only(name.group(1) or "").lower() + ascii_only(name.group(2)).lower())
            start = previous + cut + name.start()
        previous = m.end()
        if author:
            found.append((author + m.group(1) + m.group(2), start, m.end()))
    return found


class Sources:
    def __init__(self, references):
        self.full, self.volume = {}, {}
        for r in references:
            key = re.sub(r"[^a-z0-9]", "", ascii_only(r["key"]).lower())
            where = ", ".join(x for x in (r["journal"], r["volume"], r["pages"]) if x)
            doi = "doi:" + re.sub(r"^https?://(dx\.)?doi\.org/", "", r["doi"]) if r["doi"] else ""
            self.full[key] = " ".join(x for x in (r["authors"], r["year"], where, doi) if x)
            self.volume[key] = r["volume"]
        self.keys = {}                    # reference string -> key
        self.texts = dict(FIXED)          # key -> citation
        self.texts.update(self.full)
        self.wanted = set(self.full) | {"pernot-ion-data"}
        self.pairs = {}

    # -- building

    def expanded(self, text):
        """The string with short forms written out; those that carry their own journal stay as they are."""
        out, last = "", 0
        for key, start, end in citations(text):
            own_journal = re.match(r"\s+[A-Z]", text[end:])
            if key in self.full and not own_journal:
                out += text[last:start] + self.full[key]
                last = end
        parts = re.split(r"\s*;\s*", out + text[last:])
        return "; ".join(dict.fromkeys(parts))

    def learn(self, strings, gas_rows):
        """Fixes the key of every reference string; strings of the same citations share or extend a key."""
        for r in gas_rows:
            pair = tuple(sorted(r["reactants"].split(" + ")))
            if not r["reference"].startswith("same study"):
                self.pairs.setdefault(pair, []).append(r["reference"])
        groups = collections.OrderedDict()
        for text in sorted(set(strings)):
            cited = list(dict.fromkeys(k for k, _, _ in citations(text)))
            if text in NAMED:
                self.give(text, NAMED[text])
            else:
                groups.setdefault("+".join(cited), []).append(text)
        for base, texts in groups.items():
            if not base:
                for text in texts:
                    self.give(text, slug(text))
                continue
            bare = [t for t in texts if self.remainder(t) == ""]
            for text in bare:
                self.give(text, base)
            rest = [t for t in texts if t not in bare]
            alone = len(rest) == 1 and not bare and base not in self.texts
            for length in range(3, 15):     # as few words as tell the strings of this group apart
                keys = [base if alone else base + "-" + self.qualifier(t, length) for t in rest]
                if len(set(keys)) == len(keys):
                    break
            for text, key in zip(rest, keys):
                self.give(text, key)

    def remainder(self, text):
        """What a string says beyond author-year citations."""
        cut, last = "", 0
        for _, start, end in citations(text):
            cut += text[last:start]
            last = end
        return re.sub(r"[;/,\s]|\bfit\b", "", cut + text[last:])

    def qualifier(self, text, length):
        """The part of a key that tells apart strings of the same authors and years."""
        words = ["reverse"] if text.startswith("detailed balance from") else []
        rest, last = "", 0
        for _, start, end in citations(text):
            rest += text[last:start] + " "
            last = end
            journal = re.match(r"\s+((?:[A-Z][\w.&]*\s*)+\d+)", text[end:])
            if journal:
                words.append(re.sub(r"[^a-z0-9]", "", journal.group(1).lower()))
                last += len(re.match(r"\s+\S+" * (len(journal.group(1).split()) + 1) + r"|.*", text[end:]).group())
        rest = (rest + text[last:]).replace("detailed balance from:", "")
        if "doi:" in rest:
            words.append("doi")
        brackets = " ".join(re.findall(r"\(([^()]*)", rest))
        said = slug(brackets or rest, length % 12, numbers=length >= 12)
        return "-".join(words + ([said] if said else []))

    def give(self, text, key):
        if key in self.texts and self.texts[key] != TEXT.get(text, self.expanded(text)):
            both = sorted(((self.texts[key]), self.expanded(text)), key=len)
            if self.remainder(text) != "" and key not in FIXED:
                raise SystemExit("key %s for two citations:\n  %s\n  %s" % (key, *both))
            self.keys[text] = key         # same citations, written in two ways: keep the fuller one
            self.texts[key] = both[1]
            return
        self.keys[text] = key
        self.texts[key] = TEXT.get(text, self.expanded(text))

    # -- asking

    def key(self, text):
        if text not in self.keys:
            self.learn([text], [])
        self.wanted.add(self.keys[text])
        return self.keys[text]

    def add(self, key):
        self.wanted.add(key)
        return key

    def of_rows(self, rows):
        """One key for all rows of an entry; `same study` rows take the source of their pair where it is given."""
        keys = []
        for r in rows:
            text = r["reference"]
            if text.startswith("same study"):
                others = self.pairs.get(tuple(sorted(r["reactants"].split(" + "))), [text])
                keys += [self.keys[t] for t in sorted(set(others))]
            else:
                keys.append(self.keys[text])
        keys = list(dict.fromkeys(keys))
        return self.joined(keys)

    def joined(self, keys):
        text = "; ".join(self.texts[k] for k in keys)
        key = "+".join(dict.fromkeys(part for k in keys for part in k.split("+")))
        if self.texts.setdefault(key, text) != text:
            raise SystemExit("key %s for two citations:\n  %s\n  %s" % (key, self.texts[key], text))
        return self.add(key)

    def species_key(self, enthalpy_source, polar, atom):
        keys = [self.keys[enthalpy_source]]
        if polar and atom:
            self.texts["schwerdtfeger2019"] = "Schwerdtfeger & Nagle 2019 Mol. Phys. 117 1200 (polarisability)"
            keys.append("schwerdtfeger2019")
        elif polar:
            self.texts["handbook-dipole"] = "polarisability and dipole: handbook values, radicals estimated to 20 percent"
            keys.append("handbook-dipole")
        return self.joined(keys)

    def used(self):
        return sorted((k, self.texts[k]) for k in self.wanted)
