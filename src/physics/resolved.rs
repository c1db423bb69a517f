//! A way resolved: its steps composed once, in as many digits as they ask for.

use std::sync::Arc;

use nalgebra::Matrix4;

use super::big::Big;
use super::double_double::Dd;
use super::error::Impossible;
use super::lorentz::{Change, Net, Step};
use super::real::Real;

/// Bits in which a chain is composed that two doubles do not hold.
const BITS: usize = 256;
/// Largest product of γ(1+β) over the steps of a way, as a power of two.
const MAX_GROWTH: f64 = 2048.0;
/// Up to this growth a chain is composed in two doubles.
const DD_GROWTH: f64 = 20.0;
/// Up to this growth two doubles have room for squares of products of one step.
const DD_STEP_GROWTH: f64 = 66.0;
/// Below this net γ two doubles have room for its products.
const DD_GAMMA: f64 = 1e60;

/// A way whose net transformation is known, ready for any number of readings.
#[derive(Clone, Debug)]
pub struct Resolved {
    /// The steps, in pieces that ways share.
    steps: Vec<Arc<[Step]>>,
    tally: Tally,
    net: Net<Dd>,
    slack: f64,
}

/// What counts when steps are composed.
#[derive(Clone, Copy, Debug)]
struct Tally {
    /// How many steps move.
    moving: u32,
    /// log2 Π γ(1+β) over the steps.
    growth: f64,
    /// Whether two doubles hold every step.
    fits: bool,
    /// By how much the error of the worst turn exceeds that of two doubles.
    turned: f64,
    /// The largest departure of a quaternion or matrix that was mended.
    mended: f64,
    /// Whether any step is not known exactly.
    uncertain: bool,
}

impl Resolved {
    /// Composes steps that passed their checks.
    ///
    /// # Errors
    /// The speeds of the steps multiply up beyond the precision kept, or the net γ is larger
    /// than a double can hold.
    pub fn new(steps: Vec<Step>) -> Result<Resolved, Impossible> {
        let mut tally = steps.iter().map(Tally::of).fold(Tally::NOTHING, Tally::and);
        if !tally.is_simple() {
            tally.growth = steps.iter().map(|step| step.change.growth()).sum();
        }
        let steps: Arc<[Step]> = steps.into();
        Resolved::compose(vec![steps.clone()], tally, || Net::of(&*steps, ()))
    }

    /// Joins ways, one after the other, without resolving any of them again.
    ///
    /// # Errors
    /// As for [`new`](Self::new).
    pub fn join<'r>(
        parts: impl IntoIterator<Item = &'r Resolved> + Clone,
    ) -> Result<Resolved, Impossible> {
        let all = || parts.clone().into_iter();
        let steps = all().flat_map(|part| part.steps.iter().cloned()).collect();
        let tally = all()
            .map(|part| part.tally)
            .fold(Tally::NOTHING, Tally::and);
        Resolved::compose(steps, tally, || {
            all().fold(Net::IDENTITY, |net, part| net.then(&part.net))
        })
    }

    fn compose(
        steps: Vec<Arc<[Step]>>,
        mut tally: Tally,
        in_dd: impl FnOnce() -> Net<Dd>,
    ) -> Result<Resolved, Impossible> {
        if tally.is_simple() {
            // By far the most usual way: nothing to lose in composing it.
            let net = in_dd();
            tally.growth = net
                .boost
                .as_ref()
                .map_or(0.0, |_| f64::from(libm::ilogb(gamma(&net)) + 2));
            return Ok(Resolved {
                steps,
                tally,
                net,
                slack: tally.turned,
            });
        }
        let Tally { growth, .. } = tally;
        if growth > MAX_GROWTH {
            return Err(Impossible::PrecisionExhausted {
                growth,
                limit: MAX_GROWTH,
            });
        }
        let mut slack = tally.turned;
        let net = if tally.fits && growth <= DD_GROWTH {
            let net = in_dd();
            let lost = growth - libm::log2(2.0 * gamma(&net));
            slack *= f64::from(tally.moving) * libm::exp2(lost.max(0.0) / 2.0);
            net
        } else {
            let all = steps.iter().flat_map(|piece| piece.iter());
            let net = Net::<Big>::of(all, BITS + growth as usize);
            let exponent = net.boost.as_ref().and_then(|boost| boost.gamma.exponent());
            if let Some(bits) = exponent.filter(|bits| *bits > 1023) {
                return Err(Impossible::GammaOverflow { bits });
            }
            net.to_dd()
        };
        Ok(Resolved {
            steps,
            tally,
            net,
            slack,
        })
    }

    /// The net transformation to the precision of two doubles.
    pub fn net(&self) -> &Net<Dd> {
        &self.net
    }

    /// The net transformation in a big float of this precision.
    pub(super) fn big(&self, context: usize) -> Net<Big> {
        Net::of(self.steps(), context)
    }

    /// The steps as given.
    pub fn steps(&self) -> impl Iterator<Item = &Step> {
        self.steps.iter().flat_map(|piece| piece.iter())
    }

    /// How far the worst quaternion or matrix was from a rotation.
    pub fn mended(&self) -> f64 {
        self.tally.mended
    }

    /// By how much the error of the net transformation exceeds that of one step.
    pub(super) fn slack(&self) -> f64 {
        self.slack
    }

    /// log2 of what the steps multiply a field up by, one after the other.
    pub(super) fn growth(&self) -> f64 {
        self.tally.growth
    }

    /// Whether two doubles have room for products of the net γ.
    pub(super) fn fits_dd(&self) -> bool {
        gamma(&self.net) < DD_GAMMA
    }

    /// Whether any step is not known exactly.
    pub fn is_uncertain(&self) -> bool {
        self.tally.uncertain
    }

    /// Whether two doubles hold the steps and any part of the way to full precision.
    pub(super) fn composes_in_dd(&self) -> bool {
        let limit = if self.tally.moving < 2 {
            DD_STEP_GROWTH
        } else {
            DD_GROWTH
        };
        self.tally.fits && self.tally.growth <= limit
    }

    /// Λ of the net transformation, rounded to doubles.
    pub fn matrix(&self) -> Matrix4<f64> {
        if self.fits_dd() {
            return self.net.matrix(());
        }
        let context = self.context(BITS);
        self.big(context).matrix(context)
    }

    /// The precision in which a result keeps `bits` of its bits: a chain spends as many as its
    /// steps multiply up, and e^−η against e^η of the net boost takes its own.
    pub(super) fn context(&self, bits: usize) -> usize {
        bits + self.tally.growth as usize + self.net_bits()
    }

    /// Bits between e^η and e^−η of the net boost, and half as many to spare.
    pub(super) fn net_bits(&self) -> usize {
        // 2γ itself may be more than a double holds.
        (3.0 * (1.0 + libm::log2(gamma(&self.net)))) as usize
    }
}

/// γ of a net transformation.
fn gamma(net: &Net<Dd>) -> f64 {
    net.boost.as_ref().map_or(1.0, |boost| boost.gamma.hi)
}

impl Tally {
    const NOTHING: Tally = Tally {
        moving: 0,
        growth: 0.0,
        fits: true,
        turned: 1.0,
        mended: 0.0,
        uncertain: false,
    };

    /// Of one step, its growth aside.
    fn of(step: &Step) -> Tally {
        let (turned, mended) = match &step.change {
            Change::Boost(_) => (1.0, 0.0),
            Change::Rotate(turn) => (turn.slack(), turn.check().unwrap_or(0.0)),
        };
        Tally {
            moving: u32::from(step.change.moves()),
            growth: 0.0,
            fits: step.change.fits_dd(),
            turned,
            mended,
            uncertain: step.uncertainty.is_some(),
        }
    }

    fn and(self, next: Tally) -> Tally {
        Tally {
            moving: self.moving + next.moving,
            growth: self.growth + next.growth,
            fits: self.fits && next.fits,
            turned: self.turned.max(next.turned),
            mended: self.mended.max(next.mended),
            uncertain: self.uncertain || next.uncertain,
        }
    }

    /// Whether two doubles hold all steps, and no two of them move.
    fn is_simple(&self) -> bool {
        self.fits && self.moving < 2
    }
}
