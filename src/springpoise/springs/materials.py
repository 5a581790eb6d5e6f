"""Spring wires by the names of the trade.

Every number can be replaced: ``attrs.evolve(MUSIC_WIRE, shear_modulus="79.3 GPa")``, or a
:class:`WireMaterial` of your own. Three strength sets are stored under their names, to be chosen
with ``WireMaterial.with_strength(name)``.

Trust: strengths, moduli and allowable shares were seen in transcriptions, not in the standards
themselves. What was from memory says so in its ``source``.
"""

from __future__ import annotations

from springpoise.springs.wire.material import Allowable, CyclicLimits, Relaxation, WireMaterial
from springpoise.springs.wire.strength import DiameterSteps, StrengthSegment, StrengthSet

__all__ = [
    "CHROME_SILICON",
    "CHROME_VANADIUM",
    "EN_SH",
    "EN_SM",
    "EXAM_HANDBOOK",
    "HANDBOOK_1987",
    "HANDBOOK_1987_INCH",
    "HARD_DRAWN",
    "MUSIC_WIRE",
    "OIL_TEMPERED",
    "PHOSPHOR_BRONZE",
    "STAINLESS_302",
    "Allowable",
    "CyclicLimits",
    "DiameterSteps",
    "Relaxation",
    "StrengthSegment",
    "StrengthSet",
    "WireMaterial",
]

HANDBOOK_1987 = "1987 industry design handbook"
"""Name of the strength set in use: A/d^m, metric column."""
HANDBOOK_1987_INCH = "1987 industry design handbook, inch column"
"""Name of the same table's inch column, which differs by up to 0.2 %."""
EXAM_HANDBOOK = "exam handbook"
"""Name of an older set that is still printed; music wire is 8 % weaker in it at 2 mm."""

KPSI = 6.894757293168361e6
"""1000 pound-force per square inch [Pa]."""
SHIGLEY = "Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed"
MEMORY = "value from memory"


def _handbook(*segments: tuple[float, float, float, float, float]) -> tuple[StrengthSet, StrengthSet]:
    """Both columns of the table: from and to in mm, A in MPa·mm^m, m, A in kpsi·in^m."""
    ranges = [(low / 1e3, high / 1e3) for low, high, *_ in segments]
    metric = [
        StrengthSegment(low, high, at_unit_diameter=a * 1e6, exponent=m)
        for (low, high), (*_, a, m, _) in zip(ranges, segments, strict=True)
    ]
    inch = [
        StrengthSegment.from_inches(low, high, at_1_inch=a_inch * KPSI, exponent=m)
        for (low, high), (*_, m, a_inch) in zip(ranges, segments, strict=True)
    ]
    return (
        StrengthSet(HANDBOOK_1987, metric, source=f"{SHIGLEY}, after the handbook"),
        StrengthSet(HANDBOOK_1987_INCH, inch, source=f"{SHIGLEY}, after the handbook"),
    )


def _exam(low: float, high: float, a: float, m: float) -> StrengthSet:
    return StrengthSet(
        EXAM_HANDBOOK,
        StrengthSegment(low / 1e3, high / 1e3, at_unit_diameter=a * 1e6, exponent=m),
        source="wire constants of an exam handbook, as transcribed; its range was not seen and is taken from the 1987 set",
    )


CORRECTED = ("bergstraesser", "wahl", "goehner")


def _body(fraction: float) -> Allowable:
    return Allowable(fraction, CORRECTED, source=SHIGLEY)


def _set_removed(fraction: float) -> Allowable:
    return Allowable(fraction, "direct shear", source=f"{SHIGLEY}; the low end of its range")


def _hook_torsion(fraction: float) -> Allowable:
    return Allowable(fraction, "hook torsion", source=SHIGLEY)


def _hook_bending(fraction: float) -> Allowable:
    return Allowable(fraction, "hook bending", source=SHIGLEY)


def _inner(fraction: float) -> Allowable:
    return Allowable(fraction, "inner fibre", source=SHIGLEY)


# Torsion of bodies and hooks from memory; bending of torsion coils as transcribed from Shigley ch. 10.
_CYCLIC_A228_302 = (
    CyclicLimits(
        1e5,
        compression=0.36,
        compression_peened=0.42,
        extension_body=0.36,
        hook_torsion=0.34,
        hook_bending=0.51,
        torsion_body=0.53,
        torsion_body_peened=0.62,
    ),
    CyclicLimits(
        1e6,
        compression=0.33,
        compression_peened=0.39,
        extension_body=0.33,
        hook_torsion=0.30,
        hook_bending=0.47,
        torsion_body=0.50,
        torsion_body_peened=0.60,
    ),
    CyclicLimits(
        1e7, compression=0.30, compression_peened=0.36, extension_body=0.30, hook_torsion=0.28, hook_bending=0.45
    ),
)
_CYCLIC_A232 = (
    CyclicLimits(1e5, compression=0.42, compression_peened=0.49, torsion_body=0.55, torsion_body_peened=0.64),
    CyclicLimits(1e6, compression=0.40, compression_peened=0.47, torsion_body=0.53, torsion_body_peened=0.62),
    CyclicLimits(1e7, compression=0.38, compression_peened=0.46),
)

LOW_ALLOY_SLOPE = -0.25e-3
"""Relative change of the moduli of unalloyed and low-alloy wire [1/K] (EN 13906-1, value from memory)."""
STAINLESS_COPPER_SLOPE = -0.40e-3
"""Relative change of the moduli of stainless steel and copper alloys [1/K] (EN 13906-1, value from memory)."""

_SOURCE = (
    f"moduli: {SHIGLEY}; density and top temperature: there and a wire data page, as transcribed; "
    f"temperature slope (EN 13906-1) and cyclic limits in torsion: {MEMORY}"
)

_music, _music_inch = _handbook((0.10, 6.5, 2211, 0.145, 201))
MUSIC_WIRE = WireMaterial(
    "music wire, A228",
    strength=_music,
    other_strengths=[_music_inch, _exam(0.10, 6.5, 2060, 0.163)],
    young_modulus=DiameterSteps([(0.81e-3, 203.4e9), (1.6e-3, 200e9), (3.2e-3, 196.5e9)], above=193e9),
    shear_modulus=DiameterSteps([(0.81e-3, 82.7e9), (1.6e-3, 81.7e9), (3.2e-3, 81.0e9)], above=80.0e9),
    density=7850.0,
    compression=_body(0.45),
    compression_set_removed=_set_removed(0.60),
    extension_body=_body(0.45),
    hook_torsion=_hook_torsion(0.40),
    hook_bending=_hook_bending(0.75),
    torsion_body=_inner(0.78),
    cyclic=_CYCLIC_A228_302,
    modulus_slope=LOW_ALLOY_SLOPE,
    top_temperature=393.15,
    source=_SOURCE,
)
"""Music wire, ASTM A228, 0.10 to 6.5 mm."""

_hard, _hard_inch = _handbook((0.7, 12.7, 1783, 0.190, 140))
HARD_DRAWN = WireMaterial(
    "hard-drawn wire, A227",
    strength=_hard,
    other_strengths=[_hard_inch, _exam(0.7, 12.7, 1510, 0.201)],
    young_modulus=DiameterSteps([(0.81e-3, 198.6e9), (1.6e-3, 197.9e9), (3.2e-3, 197.2e9)], above=196.5e9),
    shear_modulus=DiameterSteps([(0.81e-3, 80.7e9), (1.6e-3, 80.0e9), (3.2e-3, 79.3e9)], above=78.6e9),
    density=7850.0,
    compression=_body(0.45),
    compression_set_removed=_set_removed(0.60),
    extension_body=_body(0.45),
    hook_torsion=_hook_torsion(0.40),
    hook_bending=_hook_bending(0.75),
    torsion_body=_inner(0.78),
    modulus_slope=LOW_ALLOY_SLOPE,
    top_temperature=393.15,
    source=_SOURCE,
)
"""Hard-drawn wire, ASTM A227, 0.7 to 12.7 mm."""

_oil, _oil_inch = _handbook((0.5, 12.7, 1855, 0.187, 147))
OIL_TEMPERED = WireMaterial(
    "oil-tempered wire, A229",
    strength=_oil,
    other_strengths=[_oil_inch, _exam(0.5, 12.7, 1610, 0.193)],
    young_modulus=196.5e9,
    shear_modulus=77.2e9,
    density=7850.0,
    compression=_body(0.50),
    compression_set_removed=_set_removed(0.65),
    extension_body=_body(0.45),
    hook_torsion=_hook_torsion(0.40),
    hook_bending=_hook_bending(0.75),
    torsion_body=_inner(0.87),
    modulus_slope=LOW_ALLOY_SLOPE,
    top_temperature=453.15,
    source=_SOURCE,
)
"""Oil-tempered wire, ASTM A229, 0.5 to 12.7 mm."""

_vanadium, _vanadium_inch = _handbook((0.8, 11.1, 2005, 0.168, 169))
CHROME_VANADIUM = WireMaterial(
    "chrome-vanadium wire, A232",
    strength=_vanadium,
    other_strengths=[_vanadium_inch, _exam(0.8, 11.1, 1790, 0.155)],
    young_modulus=203.4e9,
    shear_modulus=77.2e9,
    density=7850.0,
    compression=_body(0.50),
    compression_set_removed=_set_removed(0.65),
    extension_body=_body(0.45),
    hook_torsion=_hook_torsion(0.40),
    hook_bending=_hook_bending(0.75),
    torsion_body=_inner(0.87),
    cyclic=_CYCLIC_A232,
    modulus_slope=LOW_ALLOY_SLOPE,
    top_temperature=493.15,
    source=_SOURCE,
)
"""Chrome-vanadium wire, ASTM A232, 0.8 to 11.1 mm."""

_silicon, _silicon_inch = _handbook((1.6, 9.5, 1974, 0.108, 202))
CHROME_SILICON = WireMaterial(
    "chrome-silicon wire, A401",
    strength=_silicon,
    other_strengths=[_silicon_inch, _exam(1.6, 9.5, 1960, 0.091)],
    young_modulus=203.4e9,
    shear_modulus=77.2e9,
    density=7850.0,
    compression=_body(0.50),
    compression_set_removed=_set_removed(0.65),
    extension_body=_body(0.45),
    hook_torsion=_hook_torsion(0.40),
    hook_bending=_hook_bending(0.75),
    torsion_body=_inner(0.87),
    modulus_slope=LOW_ALLOY_SLOPE,
    top_temperature=523.15,
    source=_SOURCE,
)
"""Chrome-silicon wire, ASTM A401, 1.6 to 9.5 mm."""

_stainless, _stainless_inch = _handbook(
    (0.3, 2.5, 1867, 0.146, 169), (2.5, 5, 2065, 0.263, 128), (5, 10, 2911, 0.478, 90)
)
STAINLESS_302 = WireMaterial(
    "302 stainless wire, A313",
    strength=_stainless,
    other_strengths=[_stainless_inch],
    young_modulus=193e9,
    shear_modulus=69.0e9,
    density=7900.0,
    compression=_body(0.35),
    compression_set_removed=_set_removed(0.55),
    extension_body=_body(0.35),
    hook_torsion=_hook_torsion(0.30),
    hook_bending=_hook_bending(0.55),
    torsion_body=_inner(0.61),
    cyclic=_CYCLIC_A228_302,
    modulus_slope=STAINLESS_COPPER_SLOPE,
    top_temperature=533.15,
    source=f"{_SOURCE}; density: {MEMORY}",
)
"""302 stainless wire, ASTM A313, 0.3 to 10 mm; the strength steps at 2.5 and 5 mm."""

_bronze, _bronze_inch = _handbook((0.1, 0.6, 1000, 0, 145), (0.6, 2, 913, 0.028, 121), (2, 7.5, 932, 0.064, 110))
PHOSPHOR_BRONZE = WireMaterial(
    "phosphor bronze wire, B159",
    strength=_bronze,
    other_strengths=[_bronze_inch],
    young_modulus=103.4e9,
    shear_modulus=41.4e9,
    density=8800.0,
    compression=_body(0.35),
    compression_set_removed=_set_removed(0.55),
    extension_body=_body(0.35),
    hook_torsion=_hook_torsion(0.30),
    hook_bending=_hook_bending(0.55),
    torsion_body=_inner(0.61),
    spring_steel=False,
    modulus_slope=STAINLESS_COPPER_SLOPE,
    top_temperature=368.15,
    source=f"{_SOURCE}; top temperature: {MEMORY}",
)
"""Phosphor bronze wire, ASTM B159, 0.1 to 7.5 mm; the strength steps at 0.6 and 2 mm."""


def _european(name: str, at_unit_diameter: float, per_decade: float, source: str) -> WireMaterial:
    return WireMaterial(
        f"EN 10270-1 wire, class {name}",
        strength=StrengthSet(
            f"EN 10270-1 {name}",
            StrengthSegment(0.3e-3, 20e-3, at_unit_diameter=at_unit_diameter, per_decade=per_decade),
            source=source,
        ),
        young_modulus=206e9,
        shear_modulus=81.5e9,
        density=7850.0,
        compression=Allowable(0.56, "uncorrected", source=f"EN 13906-1, {MEMORY}"),
        extension_body=Allowable(0.45, "uncorrected", source=f"EN 13906-2, {MEMORY}; the factor is an assumption"),
        hook_torsion=_hook_torsion(0.40),
        hook_bending=_hook_bending(0.75),
        torsion_body=Allowable(0.70, "inner fibre", source=f"EN 13906-3, {MEMORY}; the factor is an assumption"),
        modulus_slope=LOW_ALLOY_SLOPE,
        top_temperature=373.15,
        source="EN 10270-1, as reprinted",
    )


EN_SM = _european(
    "SM", 1980e6, 740e6, f"formula: {MEMORY}; within 6 MPa of thirteen values of EN 10270-1, as reprinted"
)
"""Patented drawn unalloyed wire of medium strength, EN 10270-1 class SM, 0.3 to 20 mm."""
EN_SH = _european("SH", 2220e6, 820e6, f"{MEMORY}; the range is that of class SM")
"""The same of high strength, classes SH and DH (value from memory)."""
