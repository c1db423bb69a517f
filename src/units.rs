//! The units that questions and answers may use: one table of UCUM codes.
//!
//! To add a unit, add a row. Codes and factors: The Unified Code for Units of Measure (UCUM)
//! 2.2; `statV/cm` is our own code for the Gaussian unit of E.

use std::sync::LazyLock;

use crate::physics::scale::Scale;

/// What a unit measures.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Quantity {
    /// Electric field strength; SI unit V/m.
    E,
    /// Magnetic flux density; SI unit T.
    B,
    /// Velocity; SI unit m/s.
    Velocity,
    /// Plane angle; SI unit rad.
    Angle,
    /// Angular velocity; SI unit rad/s.
    AngularVelocity,
    /// Energy; SI unit J.
    Energy,
    /// Length; SI unit m.
    Length,
    /// Time; SI unit s.
    Time,
}

impl Quantity {
    /// All quantities, in the order of [`Units`].
    pub const ALL: [Quantity; 8] = [
        Quantity::E,
        Quantity::B,
        Quantity::Velocity,
        Quantity::Angle,
        Quantity::AngularVelocity,
        Quantity::Energy,
        Quantity::Length,
        Quantity::Time,
    ];

    /// The name of the quantity in `units`.
    pub fn name(self) -> &'static str {
        match self {
            Quantity::E => "e",
            Quantity::B => "b",
            Quantity::Velocity => "velocity",
            Quantity::Angle => "angle",
            Quantity::AngularVelocity => "angular_velocity",
            Quantity::Energy => "energy",
            Quantity::Length => "length",
            Quantity::Time => "time",
        }
    }
}

/// A unit: its code, what it measures, what it is called and its exact size in SI units.
#[derive(Debug, PartialEq)]
pub struct Unit {
    /// UCUM code, case-sensitive.
    pub code: &'static str,
    /// What it measures.
    pub quantity: Quantity,
    /// Its name in words.
    pub name: &'static str,
    /// One unit in the SI unit of the quantity.
    pub si: Scale,
}

const fn unit(quantity: Quantity, code: &'static str, name: &'static str, si: Scale) -> Unit {
    Unit {
        code,
        quantity,
        name,
        si,
    }
}

const fn of(num: u128, den: u128) -> Scale {
    Scale::ratio(num, den)
}

const EV: u128 = 1_602_176_634;
const E28: u128 = 10u128.pow(28);

/// Every unit; the SI unit of each quantity stands first among its own.
pub static UNITS: &[Unit] = &[
    unit(Quantity::E, "V/m", "volt per metre", of(1, 1)),
    unit(Quantity::E, "mV/m", "millivolt per metre", of(1, 1_000)),
    unit(Quantity::E, "uV/m", "microvolt per metre", of(1, 1_000_000)),
    unit(Quantity::E, "kV/m", "kilovolt per metre", of(1_000, 1)),
    unit(Quantity::E, "MV/m", "megavolt per metre", of(1_000_000, 1)),
    unit(Quantity::E, "V/cm", "volt per centimetre", of(100, 1)),
    unit(
        Quantity::E,
        "statV/cm",
        "statvolt per centimetre (Gaussian)",
        of(299_792_458, 10_000),
    ),
    unit(Quantity::B, "T", "tesla", of(1, 1)),
    unit(Quantity::B, "mT", "millitesla", of(1, 1_000)),
    unit(Quantity::B, "uT", "microtesla", of(1, 1_000_000)),
    unit(Quantity::B, "nT", "nanotesla", of(1, 1_000_000_000)),
    unit(Quantity::B, "pT", "picotesla", of(1, 1_000_000_000_000)),
    unit(Quantity::B, "G", "gauss", of(1, 10_000)),
    unit(Quantity::Velocity, "m/s", "metre per second", of(1, 1)),
    unit(
        Quantity::Velocity,
        "km/s",
        "kilometre per second",
        of(1_000, 1),
    ),
    unit(
        Quantity::Velocity,
        "[kn_i]",
        "knot (international)",
        of(1_852, 3_600),
    ),
    unit(Quantity::Angle, "rad", "radian", of(1, 1)),
    unit(Quantity::Angle, "deg", "degree", Scale::pi(1, 180)),
    unit(
        Quantity::AngularVelocity,
        "rad/s",
        "radian per second",
        of(1, 1),
    ),
    unit(
        Quantity::AngularVelocity,
        "deg/s",
        "degree per second",
        Scale::pi(1, 180),
    ),
    unit(
        Quantity::AngularVelocity,
        "circ/s",
        "revolution per second",
        Scale::pi(2, 1),
    ),
    unit(
        Quantity::AngularVelocity,
        "circ/min",
        "revolution per minute",
        Scale::pi(1, 30),
    ),
    unit(Quantity::Energy, "J", "joule", of(1, 1)),
    unit(Quantity::Energy, "eV", "electronvolt", of(EV, E28)),
    unit(
        Quantity::Energy,
        "keV",
        "kiloelectronvolt",
        of(EV * 1_000, E28),
    ),
    unit(
        Quantity::Energy,
        "MeV",
        "megaelectronvolt",
        of(EV * 1_000_000, E28),
    ),
    unit(
        Quantity::Energy,
        "GeV",
        "gigaelectronvolt",
        of(EV * 1_000_000_000, E28),
    ),
    unit(Quantity::Length, "m", "metre", of(1, 1)),
    unit(Quantity::Length, "km", "kilometre", of(1_000, 1)),
    unit(Quantity::Length, "cm", "centimetre", of(1, 100)),
    unit(Quantity::Length, "mm", "millimetre", of(1, 1_000)),
    unit(Quantity::Time, "s", "second", of(1, 1)),
];

/// The units of one quantity, the SI unit first.
pub fn of_quantity(quantity: Quantity) -> impl Iterator<Item = &'static Unit> {
    UNITS.iter().filter(move |unit| unit.quantity == quantity)
}

/// The unit with this code, if the quantity has one.
pub fn find(quantity: Quantity, code: &str) -> Option<&'static Unit> {
    of_quantity(quantity).find(|unit| unit.code == code)
}

/// A choice of one unit for each quantity; SI unless said otherwise.
#[derive(Clone, Copy, PartialEq)]
pub struct Units([&'static Unit; 8]);

impl Units {
    /// The unit of a quantity.
    pub fn get(&self, quantity: Quantity) -> &'static Unit {
        self.0[quantity as usize]
    }

    /// Chooses another unit for its quantity.
    pub fn set(&mut self, unit: &'static Unit) {
        self.0[unit.quantity as usize] = unit;
    }

    /// The exact size of the unit of a quantity in SI units.
    pub fn si(&self, quantity: Quantity) -> Scale {
        self.get(quantity).si
    }
}

impl Default for Units {
    fn default() -> Units {
        /// The first row of each quantity.
        static SI: LazyLock<[&'static Unit; 8]> = LazyLock::new(|| {
            Quantity::ALL.map(|quantity| {
                of_quantity(quantity)
                    .next()
                    .expect("the table has a unit of every quantity")
            })
        });
        Units(*SI)
    }
}

impl std::fmt::Debug for Units {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_list()
            .entries(self.0.iter().map(|unit| unit.code))
            .finish()
    }
}
