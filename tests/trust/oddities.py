"""What hostile files are filled with: numbers, texts, addresses and units that no file should have."""

NUMBERS = (
    "NaN", "Infinity", "-Infinity", "1e400", "-1e400", "1e308", "-1e308", "5e-324", "1e-400", "-0.0", "-0",
    "9" * 400, "-" + "9" * 5000, "1" + "0" * 30, "9223372036854775808", "1e12", "1.0000001e12", "1e-12", "0",
    "-1", "0.1" + "3" * 400, "1E5", "2.2250738585072014e-308", "3.0", "14", "100", "60", "1e6", "01", "+1",
    "0x10", "1_000", ".5", "1.", "1,5", "--1",
)  # fmt: skip

TEXTS = (
    "", " ", "\x00", "a\x00b", "\x1b[31mred", "\ud800", "\udfff\ud800", "\u202egnirts", "\u2028", "\u200b",
    "\ufeff", "line\nbreak", "tab\there", "../../etc/passwd", "..\\..\\boot.ini", "/dev/zero", "C:\\nul",
    "file:///etc/hosts", "<script>alert(1)</script>", "</script><img src=x onerror=alert(1)>", "=1+1",
    "@SUM(A1)", "{{7*7}}", "${x}", "%s%n%x", "'; drop table", "🚰" * 30, "e\u0301" * 20, "ﷺ" * 30, "x" * 81,
    "x" * 201, "x" * 20_001, "x" * 300_000, "None", "null", "NaN", "__class__", "__proto__", "constructor",
    "self", "nan", "ph", "waters", "finished", "blend", "İ" * 60, "\U000e0001", "\x7f", "\x85",
)  # fmt: skip

ADDRESSES = (
    "waters", "waters.", ".share", "waters..share", "waters.well.share.share", "waters.nobody.share", "train",
    "train.nothing.dose", "flow.flow", "flow", "sweep.dial", "../waters", "waters.river.analysis",
    "waters.river.analysis.gold", "waters.river.analysis.ph", "waters.river.train.x.dose",
    "train.caustic.dose", "train.caustic.hold.value", "train.caustic.hold.value.hold.value",
    "train.caustic.dose.hold.value",
    "waters.well.share.hold.value", "waters.0.share", "waters[0].share", "a" * 250, "holds", "targets.0.low",
    "options.0.scenario.flow", "tolerances.flow", "finished", "",
)  # fmt: skip

READOUTS = ("ph", "si_calcite", "ccpp", "gold", "", "PH", "ph ", "cost", "temperature", "dissolved_lead")
UNITS = (
    "mg/L", "mg/L as CaCO3", "mg/L as Au", "meq/L", "°C", "°F", "K", "%", "ML/d", "furlong", "", "MG/L",
    "mg/l", "µg/L", "μg/L", "mg/L as product", "mmol/L", "mg / L", "mg/L\x00",
)  # fmt: skip
HEADS = (
    0, 2, 1.0, "1", True, None, [1], "blendwright-scenario ", "other", ["winter"], [], ["a", "a"], "winter",
    "b" * 90,
)  # fmt: skip
WRAPS = (("[", "]"), ('{"a": ', "}"), ('{"id": "s", "step": "side_stream", "fraction": 5, "train": [', "]}"))
JUNK = (b"\x00", b"\xff\xfe", b"\xed\xa0\x80", b'"', b"{", b"]", b",", b"\x93\x1f\xc3\x28\x00\x07")
