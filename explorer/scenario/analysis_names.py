"""Words of laboratory sheets: how parameters, units and columns are written there."""

import re
import unicodedata
from collections.abc import Mapping

_NAMES: dict[str, str] = {
    "temperature": "temperature; temp; t; water temperature; sample temperature; temperatur",
    "ph": "ph; ph value; ph wert; field ph; lab ph; ph lab; ph field",
    "alkalinity": (
        "alkalinity; alk; total alkalinity; t alk; talk; ta; m alkalinity; m alk; alkalinity total;"
        " alkalinity m; acid capacity; ks4 3; ks 4 3; saurekapazitat; saurekapazitat bis ph 4 3; tac;"
        " acid capacity to ph 4 3; alkalinity caco3 [CaCO3]; total alkalinity caco3 [CaCO3];"
        " alk caco3 [CaCO3]; hco3 [HCO3]; bicarbonate [HCO3]; hydrogencarbonate [HCO3];"
        " hydrogen carbonate [HCO3]; hydrogencarbonat [HCO3]; bicarbonate alkalinity"
    ),
    "dic": "dic; tic; dissolved inorganic carbon; total inorganic carbon; inorganic carbon; ct",
    "co2": "co2; carbon dioxide; free co2; carbon dioxide free; free carbon dioxide; kohlendioxid",
    "calcium": "calcium; ca; calcium hardness [CaCO3]; ca hardness [CaCO3]; calcium caco3 [CaCO3]; kalzium",
    "magnesium": "magnesium; mg; magnesium hardness [CaCO3]; mg hardness [CaCO3]; magnesium caco3 [CaCO3]",
    "total_hardness": (
        "total hardness; hardness; hardness total; th; gh; gesamtharte; harte; total hardness caco3 [CaCO3];"
        " hardness caco3 [CaCO3]; ca mg"
    ),
    "sodium": "sodium; na; natrium",
    "potassium": "potassium; k; kalium",
    "chloride": "chloride; cl; chlorid",
    "sulfate": "sulfate; sulphate; so4; sulfat; sulfate so4; so4 s [S]; sulfate s [S]; sulphate s [S]",
    "nitrate": (
        "nitrate; no3; nitrat; nitrate no3; no3 n [N]; nitrate n [N]; nitrate nitrogen [N];"
        " nitrate as nitrogen [N]; nitratstickstoff [N]; n no3 [N]"
    ),
    "fluoride": "fluoride; f; fluorid",
    "phosphate": (
        "phosphate; po4; orthophosphate [PO4]; ortho phosphate [PO4]; phosphat [PO4]; phosphate po4 [PO4];"
        " po4 p [P]; phosphate p [P]; orthophosphate p [P]; ortho p [P]; phosphorus [P];"
        " phosphate phosphorus [P]; p [P]"
    ),
    "silica": (
        "silica [SiO2]; sio2 [SiO2]; reactive silica [SiO2]; dissolved silica [SiO2]; silica sio2 [SiO2];"
        " silicon [Si]; si [Si]; silica si [Si]; silicate [SiO2]; kieselsaure [SiO2]"
    ),
    "boron": "boron; b; bor",
    "ammonia": (
        "ammonia; ammonium; nh4 [NH4]; ammonium nh4 [NH4]; nh3 n [N]; nh4 n [N]; ammonia n [N];"
        " ammonium n [N]; ammonia nitrogen [N]; ammoniacal nitrogen [N]; total ammonia;"
        " ammonia as nitrogen [N]"
    ),
    "free_chlorine": "free chlorine; chlorine free; free cl2; residual chlorine free; freies chlor",
    "monochloramine": "monochloramine; nh2cl; combined chlorine; chloramine",
    "aluminium": "aluminium; aluminum; al",
    "iron": "iron; fe; total iron; iron total; eisen",
    "toc": "toc; doc; total organic carbon; dissolved organic carbon; organic carbon",
    "tds": (
        "tds; total dissolved solids; dissolved solids; residue on evaporation; dissolved solids total;"
        " abdampfruckstand"
    ),
    "conductivity": (
        "conductivity; ec; electrical conductivity; specific conductance; cond; ec25; ec 25; conductance;"
        " conductivity 25 c; ec 25 c; leitfahigkeit; elektrische leitfahigkeit"
    ),
}
"""Ways to write a parameter, in the form of :func:`normal`; in brackets the basis that the words state."""

_HEADINGS: dict[str, str] = {
    "name": "parameter; parameters; analyte; determinand; substance; component; constituent; name; test;"
    " analysis; variable; ion; stoff",
    "value": "value; result; results; reading; concentration; measured; amount; wert; messwert; ergebnis;"
    " mean; average",
    "unit": "unit; units; basis; einheit; einheiten; uom; dimension",
}

_FACTORS: dict[str, tuple[str, float]] = {
    "mg/l": ("mg/L", 1), "g/m3": ("mg/L", 1), "ppm": ("mg/L", 1), "mgl-1": ("mg/L", 1), "mg/kg": ("mg/L", 1),
    "g/l": ("mg/L", 1000), "ug/l": ("µg/L", 1), "ppb": ("µg/L", 1), "mg/m3": ("µg/L", 1),
    "mmol/l": ("mmol/L", 1), "mol/m3": ("mmol/L", 1), "mm": ("mmol/L", 1), "umol/l": ("mmol/L", 0.001),
    "mol/l": ("mol/L", 1), "meq/l": ("meq/L", 1), "mval/l": ("meq/L", 1), "ueq/l": ("meq/L", 0.001),
    "eq/l": ("eq/L", 1), "dh": ("°dH", 1), "odh": ("°dH", 1), "degdh": ("°dH", 1), "fh": ("°fH", 1),
    "degfh": ("°fH", 1), "us/cm": ("µS/cm", 1), "ms/m": ("mS/m", 1), "ms/cm": ("µS/cm", 1000),
    "s/cm": ("µS/cm", 1_000_000), "c": ("°C", 1), "degc": ("°C", 1), "celsius": ("°C", 1), "f": ("°F", 1),
    "degf": ("°F", 1), "ph": ("", 1), "phunits": ("", 1), "units": ("", 1), "-": ("", 1), "ph units": ("", 1),
}  # fmt: skip
"""Ways to write a unit, and the factor to a unit that entries have."""

_BASES = (
    "CaCO3",
    "HCO3",
    "NO3",
    "N",
    "NH4",
    "P",
    "PO4",
    "SiO2",
    "Si",
    "C",
    "Cl2",
    "Al",
    "Fe",
    "F",
    "S",
    "SO4",
)
_BASIS = {basis.lower(): basis for basis in _BASES}


def normal(text: str) -> str:
    """A word in the form it is looked up: small, without accents, subscripts, marks and "as"."""
    decomposed = unicodedata.normalize("NFKD", text)
    letters = "".join(sign for sign in decomposed if not unicodedata.combining(sign)).lower()
    words = re.sub(r"[^a-z0-9]+", " ", letters).split()
    return " ".join(
        word for word in words if word not in {"as", "als", "dissolved", "ion"} or len(words) == 1
    )


def _lookup() -> dict[str, tuple[str, str]]:
    table: dict[str, tuple[str, str]] = {}
    for key, names in _NAMES.items():
        for name in names.split(";"):
            words, _, basis = name.strip().partition(" [")
            table[normal(words)] = (key, basis.rstrip("]"))
    return table


_QUALIFIERS = (
    "",
    "total",
    "filtered",
    "unfiltered",
    "soluble",
    "reactive",
    "lab",
    "laboratory",
    "field",
    "calculated",
)
_CHARGE = re.compile(r"\s*\d?[+\-\u2212](?=\s*(?:$|[)\],;]))")
_KEYS = _lookup()
_PARTS = {normal(word.strip()): part for part, words in _HEADINGS.items() for word in words.split(";")}


def find_key(text: str, own: Mapping[str, str]) -> tuple[str, str]:
    """Analysis key and basis that a parameter's name states; "" for what it does not.

    own: names of further parameters by key.
    """
    name = normal(text)
    for key, title in own.items():
        if name and name in (normal(title), normal(key)):
            return key, ""
    # A charge stands behind a formula: "Ca2+", "SO42-", "HCO3-".
    for spelling in (name, normal(_CHARGE.sub("", unicodedata.normalize("NFKC", text)))):
        if spelling in _KEYS:
            return _KEYS[spelling]
    # "Calcium (Ca)", "Iron, total", "Nitrate - N": a name, and behind it nothing that makes it another one.
    bare = re.split(r"[(\[,;:]| - ", text)[0]
    rest = normal(text[len(bare) :])
    if bare != text and normal(bare) in _KEYS:
        key, basis = _KEYS[normal(bare)]
        if rest in _BASIS:
            return key, _BASIS[rest]
        same = rest in _QUALIFIERS or _KEYS.get(rest, ("",))[0] == key
        if same or find_unit(text[len(bare) :].strip(" ,;:()[]"))[0] is not None:
            return key, basis
    words = name.split()
    found = {_KEYS[word][0] for word in words if word in _KEYS and len(word) > 1}
    if len(words) > 1 and len(found) == 1 and all(word in _KEYS for word in words):
        return found.pop(), ""
    return "", ""


def find_unit(text: str) -> tuple[str | None, float, str]:
    """Unit, the factor to it, and the basis that a unit's text states; None for no unit."""
    written = (
        unicodedata.normalize("NFKC", text).strip().strip("()[]").replace("\u03bc", "u").replace("µ", "u")
    )
    lowered = written.lower().replace("°", "deg").replace("º", "deg").replace("μ", "u").replace("³", "3")
    match = re.fullmatch(r"(m|u|µ)?g\s*([a-z0-9]+)\s*/\s*l", lowered)
    if match and match[2] in _BASIS:
        unit, factor = _FACTORS[f"{match[1] or ''}g/l"]
        return unit, factor, _BASIS[match[2]]
    amount, basis = lowered, ""
    match = re.fullmatch(r"(\S+?)\s*(?:as|als|\(|\[|,|\s)\s*([a-z0-9]+)[+\-\d]*\s*[)\]]?", lowered)
    if match and match[2] in _BASIS:
        amount, basis = match[1], _BASIS[match[2]]
    compact = re.sub(r"[\s·*]", "", amount).replace("lit", "l").replace("litre", "l")
    if compact in _FACTORS:
        unit, factor = _FACTORS[compact]
        return unit, factor, basis
    return None, 1.0, ""


def is_heading(text: str) -> str:
    """Which column a heading is of: name, value or unit; "" for none."""
    name = normal(re.split(r"[(\[]", text)[0])
    return _PARTS.get(name, "")
