//! Constants of nature: CODATA 2022 recommended values (Mohr, Newell, Taylor and Tiesinga,
//! Rev. Mod. Phys. 97 (2025) 025002), and the exact ones that define the SI.

use super::scale::Scale;

/// c in m/s, exact (the definition of the metre).
pub const SPEED_OF_LIGHT: u128 = 299_792_458;
/// c in m/s as a double (exact).
pub const C: f64 = 299_792_458.0;
/// The elementary charge in C, exact: the size of 1 eV in J.
pub const ELEMENTARY_CHARGE: Scale = Scale::ratio(1_602_176_634, 10u128.pow(28));
/// ε₀ in F/m.
pub const ELECTRIC_CONSTANT: f64 = 8.854_187_818_8e-12;
/// μ₀ in N/A².
pub const MAGNETIC_CONSTANT: f64 = 1.256_637_061_27e-6;

/// One row of the table of constants.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Constant {
    /// Name as used in this service.
    pub name: &'static str,
    /// Usual symbol.
    pub symbol: &'static str,
    /// Value.
    pub value: f64,
    /// Unit of value and uncertainty, a UCUM code; "1" for a pure number.
    pub unit: &'static str,
    /// Standard uncertainty; zero where the value is exact by definition.
    pub uncertainty: f64,
    /// Where the value is published.
    pub source: &'static str,
}

const SI: &str = "SI Brochure, 9th ed. (2019), exact";
const CODATA: &str = "CODATA 2022";

const fn row(
    name: &'static str,
    symbol: &'static str,
    value: f64,
    unit: &'static str,
    uncertainty: f64,
    source: &'static str,
) -> Constant {
    Constant {
        name,
        symbol,
        value,
        unit,
        uncertainty,
        source,
    }
}

/// Every constant that an answer may depend on, and those of the particles that set a γ.
pub const CONSTANTS: &[Constant] = &[
    row("speed_of_light", "c", C, "m/s", 0.0, SI),
    row("elementary_charge", "e", 1.602_176_634e-19, "C", 0.0, SI),
    row("planck_constant", "h", 6.626_070_15e-34, "J.s", 0.0, SI),
    row(
        "electric_constant",
        "ε₀",
        ELECTRIC_CONSTANT,
        "F/m",
        1.4e-21,
        CODATA,
    ),
    row(
        "magnetic_constant",
        "μ₀",
        MAGNETIC_CONSTANT,
        "N/A2",
        2.0e-16,
        CODATA,
    ),
    row(
        "impedance_of_vacuum",
        "Z₀",
        376.730_313_412,
        "Ohm",
        5.9e-8,
        CODATA,
    ),
    row(
        "fine_structure_constant",
        "α",
        7.297_352_564_3e-3,
        "1",
        1.1e-12,
        CODATA,
    ),
    row(
        "electron_mass",
        "mₑ",
        9.109_383_713_9e-31,
        "kg",
        2.8e-40,
        CODATA,
    ),
    row(
        "electron_rest_energy",
        "mₑc²",
        0.510_998_950_69,
        "MeV",
        1.6e-10,
        CODATA,
    ),
    row(
        "muon_rest_energy",
        "m_μc²",
        105.658_375_5,
        "MeV",
        2.3e-6,
        CODATA,
    ),
    row(
        "proton_rest_energy",
        "mₚc²",
        938.272_089_43,
        "MeV",
        2.9e-7,
        CODATA,
    ),
    row(
        "deuteron_rest_energy",
        "m_dc²",
        1_875.612_945,
        "MeV",
        5.8e-7,
        CODATA,
    ),
    row(
        "alpha_rest_energy",
        "m_αc²",
        3_727.379_411_8,
        "MeV",
        1.2e-6,
        CODATA,
    ),
    row(
        "muon_magnetic_moment_anomaly",
        "a_μ",
        1.165_920_62e-3,
        "1",
        4.1e-10,
        CODATA,
    ),
];

/// A particle whose kinetic energy can set a γ.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Particle {
    /// Name as used in questions.
    pub name: &'static str,
    /// Rest energy in eV.
    pub rest_energy: Scale,
}

/// The rest energies of [`CONSTANTS`] in eV, as exact decimals.
pub const PARTICLES: &[Particle] = &[
    particle("electron", Scale::ratio(51_099_895_069, 100_000)),
    particle("muon", Scale::ratio(1_056_583_755, 10)),
    particle("proton", Scale::ratio(93_827_208_943, 100)),
    particle("deuteron", Scale::ratio(1_875_612_945, 1)),
    particle("alpha", Scale::ratio(37_273_794_118, 10)),
];

const fn particle(name: &'static str, rest_energy: Scale) -> Particle {
    Particle { name, rest_energy }
}
