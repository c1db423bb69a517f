//! A boost as it is applied, whatever the form its motion was given in.

use super::double_double::Dd;
use super::real::{Factor, Real, Vec3, norm2, scale};

/// A boost ready to be applied, in the arithmetic R.
#[derive(Clone, Debug)]
pub struct Boost<R> {
    /// d, along the velocity.
    pub direction: Vec3<R>,
    /// s, with γβ (as a vector) = s d.
    pub stretch: R,
    /// γ.
    pub gamma: R,
}

impl<R: Real> Boost<R> {
    /// By a velocity in units of `beta` times c.
    #[inline(always)]
    pub(super) fn by_velocity<D>(velocity: Vec3<D>, beta: R) -> Boost<R>
    where
        D: Factor<D, Product = R> + Into<R>,
    {
        let root = one_less_beta2(&velocity, beta.clone()).sqrt();
        Boost::by_root(velocity, root, beta)
    }

    /// The same with √(1−β²) at hand.
    #[inline(always)]
    pub(super) fn by_root<D: Into<R>>(velocity: Vec3<D>, root: R, beta: R) -> Boost<R> {
        let gamma = beta.of(1.0) / root;
        Boost {
            direction: velocity.map(D::into),
            stretch: beta * gamma.clone(),
            gamma,
        }
    }

    pub(super) fn along(direction: Vec3<R>, length: R, gamma: R, gamma_less_one: R) -> Boost<R> {
        let gamma_beta = (gamma_less_one.clone() * (gamma.clone() + gamma.of(1.0))).sqrt();
        Boost {
            direction,
            stretch: gamma_beta / length,
            gamma,
        }
    }

    /// The boost that undoes this one.
    #[inline(always)]
    pub fn inverse(self) -> Boost<R> {
        Boost {
            stretch: -self.stretch,
            ..self
        }
    }

    /// k = s²/(γ+1) = (γ−1)/d².
    #[inline(always)]
    pub fn curvature(&self) -> R {
        self.stretch.square() / self.gamma.clone().sum(self.gamma.of(1.0))
    }

    /// γ − 1, to its own full precision.
    pub fn gamma_less_one(&self) -> R {
        self.curvature() * norm2(&self.direction)
    }

    /// γβ as a vector.
    pub fn gamma_beta(&self) -> Vec3<R> {
        scale(&self.stretch, &self.direction)
    }

    /// β as a vector.
    pub fn beta(&self) -> Vec3<R> {
        // Both brought near one first, so that no product leaves the range.
        let n = self.gamma.exponent().unwrap_or(0) as i32;
        let per_gamma = self.stretch.scale2(-n) / self.gamma.scale2(-n);
        scale(&per_gamma, &self.direction)
    }

    /// The boost with its numbers to the precision of two doubles.
    pub fn to_dd(&self) -> Boost<Dd> {
        Boost {
            direction: std::array::from_fn(|i| self.direction[i].to_dd()),
            stretch: self.stretch.to_dd(),
            gamma: self.gamma.to_dd(),
        }
    }
}

/// 1 − (unit·|v|)².
#[inline(always)]
pub(super) fn one_less_beta2<D, R>(velocity: &Vec3<D>, unit: R) -> R
where
    D: Factor<D, Product = R>,
    R: Real,
{
    unit.of(1.0) - norm2(velocity) * unit.square()
}
