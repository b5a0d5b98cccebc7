"""How results come about, in words for page and report: method, limits, conventions, studies, constants."""

from dataclasses import dataclass

from explorer.chemistry.constants import Constant
from explorer.scenario.words import formula_text

METHOD = (
    "Mixing and dosing conserve alkalinity, inorganic carbon, every element and heat; these totals are"
    " carried through the plant. Wherever a result is asked for, they are brought to equilibrium: a damped"
    " Newton iteration over all components with ion pairs, activity coefficients by Davies, and constants at"
    " the temperature of the water. pH is minus log10 of the activity of H+.",
    "Solids and air take part only in steps that say so. The precipitation potential is the way to calcite"
    " equilibrium in closed water. Chlorine and ammonia react to the end of their stoichiometry. A rest of"
    " charge in an analysis stays as it is and does not touch the pH.",
)

VALIDITY = (
    "Valid for 0 to 60 °C, pH 4 to 11.5 and ionic strength to about 0.1 mol/L, a guide to 0.5; not for"
    " seawater and not for boilers."
)


@dataclass(frozen=True)
class Method:
    """What a study or a convention is, in a sentence or two, and who says so."""

    name: str
    text: str
    source: str


OWN = "arithmetic of this program"
COMMON_PRACTICE = "common practice"

CONVENTIONS = (
    Method(
        "Sign of the precipitation potential",
        "Positive precipitates, negative dissolves; the word always stands beside the number. Rules that"
        " count what a water dissolves as positive have the opposite sign.",
        COMMON_PRACTICE,
    ),
    Method(
        "Zero level of alkalinity",
        "H2O, CO2, H2PO4-, NH4+, HOCl, HSO3-, B(OH)3, H4SiO4, SO4-2, F-, Al+3, Fe+3 and the fully protonated"
        " form of every other acid. Alkalinity is what a titration with strong acid to that level takes:"
        " phosphate, silicate, borate, ammonia, hypochlorite and organic matter are in it.",
        "definition",
    ),
    Method(
        "Molar and molal",
        "Totals are mol per litre, constants are on the molal scale, and the two are taken as the same: they"
        " differ by less than 0.5 % in the range used here.",
        "definition",
    ),
    Method(
        "Activity",
        "Davies for ions, log10 γ = 0.1 I for neutral species. The Debye-Hückel slope follows the"
        " temperature; 0.5098 at 25 °C.",
        "Davies 1962; slope fitted to IAPWS-95 density and the IAPWS 1997 dielectric constant",
    ),
    Method(
        "Temperature of a reading",
        "A laboratory pH fixes the water at the temperature at which it was read. From there on totals are"
        " conserved, and the pH moves with the temperature by itself.",
        "definition",
    ),
    Method(
        "Non-detects",
        "Half the limit is used for the result, and 0 to the limit as the range.",
        COMMON_PRACTICE,
    ),
    Method(
        "Units",
        "A plain mg/L means the ion or substance itself; alkalinity, hardness and the precipitation potential"
        " are counted as CaCO3. A plain mg/L of a chemical means the pure substance of its formula.",
        COMMON_PRACTICE,
    ),
    Method(
        "Buffer intensity",
        "Change of the alkalinity with pH at constant temperature and other totals: all acids, bases and ion"
        " pairs of the water count, nothing precipitates and nothing goes to the air.",
        "definition (Van Slyke 1922, from memory)",
    ),
)

STUDIES = (
    Method(
        "Sweep",
        "One dial is varied, everything else stands; held doses are worked out anew at every point. Where a"
        " target is crossed is looked for between the points.",
        OWN,
    ),
    Method(
        "Hold",
        "A dial is computed so that a readout at a place of the plant has a value: a dose that holds the pH"
        " behind its step by the alkalinity that this takes; any other dial, or up to four together, with the"
        " whole plant calculated for every try. Where it cannot be met, the dial stands where it comes"
        " nearest, and a note says so.",
        "inverse quadratic interpolation in a bracket (Chandrupatla 1997); damped least"
        " squares (Levenberg 1944, Marquardt 1963, from memory)",
    ),
    Method(
        "Window",
        "Two dials are varied over a map. A place is clear where every entered target is met; elsewhere it is"
        " shaded by the first target in the list that is missed. Borders are found to 1/128 of a cell.",
        OWN,
    ),
    Method(
        "Tolerance",
        "All inputs that may be off are drawn at once, within their tolerances and as correlated as stated;"
        " the fan shows the middle 50 and 95 % of the results. It says how far inputs carry, not whether the"
        " model is right.",
        "scrambled Sobol' sequence (Sobol' 1967, Owen 1998, from memory)",
    ),
    Method(
        "Extremes",
        "All combinations of the ends of the tolerances are calculated and a search goes on from the worst,"
        " so that an input whose slope is zero where nothing is off cannot hide. Anywhere means the whole"
        " sweep in every season; the place of the extreme stands beside it.",
        OWN,
    ),
    Method(
        "Ranking",
        "The width that an input alone gives a result, and the width that is saved when its tolerance is"
        " halved: the second says which measurement pays. Both come from the same random numbers, so that"
        " small differences can be told.",
        OWN,
    ),
    Method(
        "Largest tolerance",
        "How far one dial, or several together in all combinations, may be off for a readout to stay within a"
        " distance of its value, nothing else being off. The first place where it would go beyond is named.",
        OWN,
    ),
    Method(
        "Titration",
        "A chemical is added in steps to the water at a place of the plant; floc and chlorine react as they"
        " do behind a dose, nothing else precipitates and nothing goes to the air.",
        OWN,
    ),
    Method(
        "Logarithmic diagram",
        "All species at the fixed totals of the water against pH, alkalinity being the one total that moves."
        " The line of the water's own pH crosses every species at its present concentration.",
        "graphical method of the textbooks of aquatic chemistry",
    ),
    Method(
        "Compare",
        "Cases are evaluated one by one; only rows that differ are shown. With a source off, the other shares"
        " make up the flow in proportion; flows of their own are kept.",
        OWN,
    ),
    Method(
        "Ledger",
        "What sources and doses bring per litre of finished water, with the stoichiometry of solids, gas and"
        " chlorine reactions. What no line explains is shown as a difference.",
        "conservation of mass",
    ),
    Method(
        "Hand checks",
        "The arithmetic of the present case with figures as printed, beside what the engine has. They need a"
        " pencil and nothing of this program.",
        OWN,
    ),
    Method(
        "Measured points",
        "Bias is the mean of model less measured, scatter the standard deviation of the differences about it"
        " (n − 1). The points stay in the scenario file and change no result.",
        "definition",
    ),
    Method(
        "Quantities",
        "Doses times flow, by strength and density of the product: pumps, tanks, tonnes a year, dry solids,"
        " money at the entered prices. A product without an entered strength has the usual one.",
        OWN,
    ),
    Method(
        "Alarms",
        "Rules that look for what makes a result misleading: next to no buffer, a coagulant outside its pH,"
        " a dip of the precipitation potential between two good waters, chemicals that must not meet. Each"
        " names its place and its source.",
        "with each alarm",
    ),
)

OUTSIDE_CHECKS = (
    "The engine is compared with published figures that played no part in building it. Of each case the"
    " figure is shown that differs most for its tolerance; ▲ marks cases in which engine and publication are"
    " known to part.",
    "Beside them stand a second formulation of the same equilibrium (minimised Gibbs energy) and the same"
    " equations at fifty digits, which agree to the last digits of the engine.",
)


def reaction_text(constant: Constant) -> str:
    """A reaction as chemists write it."""
    return " ".join(formula_text(word) if len(word) > 1 else word for word in constant.text.split(" "))


def confidence_text(constant: Constant) -> str:
    """Whether the constant has been seen in its source, in words; first the value, then its temperature."""
    seen = [part == "verified" for part in (constant.confidence, constant.confidence_of_temperature)]
    if all(seen):
        return "seen in the source"
    return "value seen in the source, temperature from memory" if seen[0] else "from memory"
