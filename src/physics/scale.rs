//! Exact scales between units: a ratio of whole numbers, times π or not.

use super::real::Real;

/// num/den · π^pi, not always in lowest terms. Every factor between units is one, so that no digit is lost to units.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Scale {
    /// Numerator.
    pub num: u128,
    /// Denominator.
    pub den: u128,
    /// Power of π.
    pub pi: i8,
}

impl Scale {
    /// One.
    pub const ONE: Scale = Scale::ratio(1, 1);

    /// num/den.
    pub const fn ratio(num: u128, den: u128) -> Scale {
        Scale { num, den, pi: 0 }
    }

    /// num/den · π.
    pub const fn pi(num: u128, den: u128) -> Scale {
        Scale { num, den, pi: 1 }
    }

    /// The scale by which numbers in unit `self` are restated in unit `other`.
    pub fn over(self, other: Scale) -> Scale {
        if self == other {
            return Scale::ONE;
        }
        let pi = self.pi - other.pi;
        // Lowest terms cost a hundred divisions, and are needed only where a product overflows.
        let products = (
            self.num.checked_mul(other.den),
            self.den.checked_mul(other.num),
        );
        if let (Some(num), Some(den)) = products {
            return Scale { num, den, pi };
        }
        let reduced = |a: u128, b: u128| {
            let common = gcd(a, b);
            (a / common, b / common)
        };
        let (num, other_num) = reduced(self.num, other.num);
        let (other_den, den) = reduced(other.den, self.den);
        Scale {
            num: num * other_den,
            den: den * other_num,
            pi,
        }
    }

    /// The scale of a product of two quantities.
    pub fn times(self, other: Scale) -> Scale {
        self.over(Scale {
            num: other.den,
            den: other.num,
            pi: -other.pi,
        })
    }

    /// The value as a real number.
    pub fn value<R: Real>(self, context: R::Context) -> R {
        if self == Scale::ONE {
            return R::new(1.0, context);
        }
        let mut value = R::ratio(self.num, self.den, context);
        for _ in 0..self.pi {
            value = value * R::pi(context);
        }
        for _ in self.pi..0 {
            value = value / R::pi(context);
        }
        value
    }

    /// The nearest double.
    pub fn to_f64(self) -> f64 {
        const EXACT: u128 = 1 << 53;
        if self.pi == 0 && self.num <= EXACT && self.den <= EXACT {
            return self.num as u64 as f64 / self.den as u64 as f64;
        }
        self.value::<super::Dd>(()).to_f64()
    }

    /// The same scale in lowest terms.
    pub fn reduced(self) -> Scale {
        let common = gcd(self.num, self.den);
        Scale {
            num: self.num / common,
            den: self.den / common,
            pi: self.pi,
        }
    }
}

impl std::fmt::Display for Scale {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let reduced = self.reduced();
        write!(f, "{}", reduced.num)?;
        match self.pi {
            0 => {}
            1 => f.write_str("*pi")?,
            n => write!(f, "*pi^{n}")?,
        }
        if reduced.den == 1 {
            Ok(())
        } else {
            write!(f, "/{}", reduced.den)
        }
    }
}

fn gcd(a: u128, b: u128) -> u128 {
    if b == 0 { a } else { gcd(b, a % b) }
}
