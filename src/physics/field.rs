//! The field of one event, and how a net transformation acts on it.

use super::constants::SPEED_OF_LIGHT;
use super::double_double::{Dd, DoubleDouble};
use super::lorentz::Net;
use super::pure_boost::Boost;
use super::quaternion::Quaternion;
use super::real::{Factor, Real, Vec3, cross, dot, vector};
use super::reduction::Reduction;
use super::scale::Scale;

/// Electric and magnetic field of one event as doubles, with the exact scale of their units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Measured {
    /// E as read; once reduced, in units of `units.e`.
    pub e: [f64; 3],
    /// B as read; once reduced, in units of `units.b`.
    pub b: [f64; 3],
    /// What a unit is.
    pub units: FieldUnits,
    /// How E and B follow from what was read.
    pub reduction: Reduction,
}

/// The units of E in V/m and of B in T.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct FieldUnits {
    /// One unit of E in V/m.
    pub e: Scale,
    /// One unit of B in T.
    pub b: Scale,
}

impl FieldUnits {
    /// V/m and T.
    pub const SI: FieldUnits = FieldUnits {
        e: Scale::ONE,
        b: Scale::ONE,
    };

    /// One unit of E, and of B times c, in V/m.
    pub fn volts_per_metre<R: Real>(self, context: R::Context) -> [R; 2] {
        let cb = self.b.times(Scale::ratio(SPEED_OF_LIGHT, 1));
        [self.e.value(context), cb.value(context)]
    }

    /// How many units of E one unit of cB is.
    pub fn cb_over_e(self) -> Scale {
        self.b.times(Scale::ratio(SPEED_OF_LIGHT, 1)).over(self.e)
    }

    /// The same as a number, and how many units of cB one unit of E is.
    pub(super) fn ratios<R: Real>(self, context: R::Context) -> [R; 2] {
        let ratio = self.cb_over_e();
        [ratio, Scale::ONE.over(ratio)].map(|ratio| ratio.value(context))
    }
}

/// E and cB in one unit, in the arithmetic R.
#[derive(Clone, Debug)]
pub struct Field<R> {
    /// E.
    pub e: Vec3<R>,
    /// cB.
    pub cb: Vec3<R>,
}

impl Measured {
    /// E and B that need no reduction.
    pub fn new(e: [f64; 3], b: [f64; 3], units: FieldUnits) -> Measured {
        Measured {
            e,
            b,
            units,
            reduction: Reduction::default(),
        }
    }

    /// E and B in their own units.
    pub fn vectors<R: Real>(&self, context: R::Context) -> [Vec3<R>; 2] {
        if self.reduction.is_none() {
            return [vector(self.e, context), vector(self.b, context)];
        }
        self.reduction.apply([self.e, self.b], context)
    }

    /// The size of what is summed for each component of E and B, in their own units.
    pub fn magnitudes(&self) -> [[f64; 3]; 2] {
        self.reduction.magnitudes([self.e, self.b])
    }

    /// E and cB in V/m divided by 2ⁿ; `volts` is [`FieldUnits::volts_per_metre`].
    pub fn field<R: Real>(&self, n: i32, volts: &[R; 2], context: R::Context) -> Field<R> {
        let part = |x: Vec3<R>, unit: &R| {
            if n == 0 {
                x.map(|x| x * unit.clone())
            } else {
                x.map(|x| x.scale2(-n) * unit.clone())
            }
        };
        let [e, b] = self.vectors::<R>(context);
        Field {
            e: part(e, &volts[0]),
            cb: part(b, &volts[1]),
        }
    }

    /// About log2 of the largest component of E and cB in V/m; `None` when all are zero.
    pub fn exponent(&self, volts: &[Dd; 2]) -> Option<i32> {
        let part = |x: &[f64; 3], unit: f64| {
            let largest = x.iter().fold(0.0f64, |m, x| m.max(*x));
            (largest > 0.0).then(|| libm::ilogb(largest) + libm::ilogb(unit))
        };
        let [e_size, b_size] = self.magnitudes();
        part(&e_size, volts[0].hi).max(part(&b_size, volts[1].hi))
    }
}

/// A net transformation made ready for fields in given units: a few products per reading.
///
/// E' = M [E + k (d×E)×d + p d×B], B' = M [B + k (d×B)×d − q d×E]; see
/// [`boost`](super::boost) for k, with p = s·(cB/E) and q = s/(cB/E) between the units.
#[derive(Clone, Debug)]
pub struct Kernel<R, D = R> {
    /// d, k, p and q; `None` when nothing moves.
    pub motion: Option<(Vec3<D>, R, R, R)>,
    /// M; `None` when nothing turns.
    pub matrix: Option<[Vec3<R>; 3]>,
    /// How many units of E one unit of cB is, about.
    pub cb_over_e: f64,
}

impl<R: Real> Kernel<R> {
    /// Prepares a net transformation for fields in these units.
    pub fn new(net: &Net<R>, units: FieldUnits, context: R::Context) -> Kernel<R> {
        let ratios = units.ratios(context);
        let turn = net.turn.as_ref().filter(|turn| !turn.is_identity());
        Kernel {
            motion: net.boost.as_ref().map(|boost| Self::motion(boost, &ratios)),
            matrix: turn.map(Quaternion::matrix),
            cb_over_e: ratios[0].to_f64(),
        }
    }

    /// d, k, p and q of a boost; the ratios are those between the units, of cB to E and of E to cB.
    #[inline(always)]
    pub(super) fn motion(boost: &Boost<R>, [cb_over_e, e_over_cb]: &[R; 2]) -> (Vec3<R>, R, R, R) {
        let p = boost.stretch.clone() * cb_over_e.clone();
        let q = boost.stretch.clone() * e_over_cb.clone();
        (boost.direction.clone(), boost.curvature(), p, q)
    }

    /// Every number in it.
    pub(super) fn numbers(&self) -> impl Iterator<Item = &R> {
        let of_motion = self
            .motion
            .iter()
            .flat_map(|(d, k, p, q)| d.iter().chain([k, p, q]));
        of_motion.chain(self.matrix.iter().flatten().flatten())
    }
}

impl Kernel<Dd> {
    /// The same, to be worked with by other instructions.
    #[inline(always)]
    pub(super) fn by<A>(&self) -> Kernel<DoubleDouble<A>> {
        let motion = self.motion.as_ref();
        Kernel {
            motion: motion.map(|(d, k, p, q)| (d.map(Dd::by), k.by(), p.by(), q.by())),
            matrix: self.matrix.map(|rows| rows.map(|row| row.map(Dd::by))),
            cb_over_e: self.cb_over_e,
        }
    }
}

impl<R: Real, D: Clone> Kernel<R, D> {
    /// E' and B' in the units of E and B.
    #[inline(always)]
    pub fn apply<F>(&self, e: &Vec3<F>, b: &Vec3<F>) -> (Vec3<R>, Vec3<R>)
    where
        F: Clone + Into<R>,
        D: Factor<F, Product = R>,
        R: Factor<D, Product = R>,
    {
        let (e, b) = match &self.motion {
            Some((d, k, p, q)) => {
                let (xe, xb) = (cross(d, e), cross(d, b));
                (
                    moved(e, (k, &cross(&xe, d)), (p, &xb)),
                    moved(b, (k, &cross(&xb, d)), (&-q.clone(), &xe)),
                )
            }
            None => (e.clone().map(F::into), b.clone().map(F::into)),
        };
        match &self.matrix {
            Some([x, y, z]) => (
                [dot(x, &e), dot(y, &e), dot(z, &e)],
                [dot(x, &b), dot(y, &b), dot(z, &b)],
            ),
            None => (e, b),
        }
    }
}

/// A field with so much of its own part across the motion, and so much of the other across it.
#[inline(always)]
fn moved<F, R>(own: &Vec3<F>, (k, across): (&R, &Vec3<R>), (p, other): (&R, &Vec3<R>)) -> Vec3<R>
where
    F: Clone + Into<R>,
    R: Real,
{
    let component = |i: usize| {
        let own: R = own[i].clone().into();
        own.sum3(k.product(&across[i]), p.product(&other[i]))
    };
    [component(0), component(1), component(2)]
}
