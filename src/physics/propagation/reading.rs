//! The errors of a reading: as read, and of the calibration of its sensor.

use super::algebra::{Matrix6, combine, diagonal, field, half, sandwich, six};
use super::{Inputs, Source};
use crate::physics::field::{Field, Kernel};
use crate::physics::real::{Real, Vec3, vector};
use crate::physics::reduction::fill_sensitivities;
use crate::physics::uncertain::{UncertainCalibration, UncertainReading};

impl Inputs<'_> {
    /// The errors of the reading as errors of E and cB in the frame of the question.
    pub(super) fn reading_blocks<R: Real>(
        &self,
        reading: &UncertainReading,
        volts: &[R; 2],
        context: R::Context,
    ) -> Vec<FieldBlock<R>> {
        let reduction = &self.field.reduction;
        let zero = || vector::<R>([0.0; 3], context);
        // A column of E or of B in its own unit, through the filled component, in V/m.
        let fill = reduction.filled.map(|i| {
            let [e, b] = self.field.vectors::<R>(context);
            (i, fill_sensitivities(i, &e, &b))
        });
        let column = |which: usize, own: Vec3<R>| -> [R; 6] {
            let (mut e, b) = if which == 0 {
                (own, zero())
            } else {
                (zero(), own)
            };
            if let Some((i, by)) = &fill {
                let own = six(Field {
                    e: e.clone(),
                    cb: b.clone(),
                });
                e[*i] = (0..6)
                    .filter(|k| k != i)
                    .fold(R::new(0.0, context), |sum, k| {
                        sum + by[k].clone() * own[k].clone()
                    });
            }
            six(Field {
                e: e.map(|x| x * volts[0].clone()),
                cb: b.map(|x| x * volts[1].clone()),
            })
        };
        let calibration = [&reduction.e, &reduction.b];
        let raw = |which: usize, i: usize| -> Vec3<R> {
            std::array::from_fn(|row| match calibration[which] {
                Some(calibration) => R::new(calibration.matrix[row][i], context),
                None => R::new(if row == i { 1.0 } else { 0.0 }, context),
            })
        };
        let mut blocks = vec![FieldBlock {
            source: None,
            columns: (0..6).map(|k| column(k / 3, raw(k / 3, k % 3))).collect(),
            covariance: reading.field.matrix(context).map(Vec::from).into(),
            root: reading.field.root().map(Vec::from).into(),
        }];
        let raw_numbers = [self.field.e, self.field.b];
        let sources = [Source::CalibrationE, Source::CalibrationB];
        for which in 0..2 {
            let (Some(calibration), Some(uncertain)) =
                (calibration[which], &reading.calibration[which])
            else {
                continue;
            };
            let net: Vec3<R> = std::array::from_fn(|i| {
                R::new(raw_numbers[which][i], context) - R::new(calibration.offset[i], context)
            });
            // The elements of a row act on one component: their errors add up to one.
            let gain = gain_variances(uncertain, &net);
            let unit = |i: usize| -> Vec3<R> {
                std::array::from_fn(|j| R::new(if i == j { 1.0 } else { 0.0 }, context))
            };
            let offset = uncertain.offset.map(|x| R::new(x, context).square());
            let variances: Vec<R> = gain.into_iter().chain(offset).collect();
            let columns = (0..3)
                .map(|i| column(which, unit(i)))
                .chain((0..3).map(|i| column(which, raw(which, i))));
            blocks.push(FieldBlock {
                source: Some(sources[which]),
                columns: columns.collect(),
                root: diagonal(&variances, |x| x.sqrt().to_f64(), 0.0),
                covariance: diagonal(&variances, R::clone, R::new(0.0, context)),
            });
        }
        blocks
    }
}

/// Of each component: Σ σ_Gij² (raw_j − o_j)².
fn gain_variances<R: Real>(uncertain: &UncertainCalibration, net: &Vec3<R>) -> Vec3<R> {
    uncertain.matrix.map(|row| {
        (0..3).fold(net[0].of(0.0), |sum, j| {
            sum + (net[0].of(row[j]) * net[j].clone()).square()
        })
    })
}

/// Errors of E and cB, in V/m by the unit of the error.
pub(super) struct FieldBlock<R> {
    /// `None`: E and B as read.
    source: Option<Source>,
    columns: Vec<[R; 6]>,
    covariance: Vec<Vec<R>>,
    root: Vec<Vec<f64>>,
}

impl<R: Real> FieldBlock<R> {
    pub(super) fn seen_after(self, kernel: &Kernel<R>) -> FieldBlock<R> {
        let columns = self.columns.into_iter().map(|column| {
            let Field { e, cb } = field(&column);
            let (e, cb) = kernel.apply(&e, &cb);
            six(Field { e, cb })
        });
        FieldBlock {
            columns: columns.collect(),
            ..self
        }
    }

    pub(super) fn covariance(&self) -> Matrix6<R> {
        sandwich(&self.columns, &self.covariance)
    }

    /// Its parts by source: what E and B share is a part of its own.
    pub(super) fn parts(&self) -> Vec<(Source, Matrix6<R>)> {
        if let Some(source) = self.source {
            return vec![(source, self.covariance())];
        }
        // The blocks of the matrix: 0 between components of E, 2 of B, 1 between E and B.
        let of_block = |block: usize| -> Vec<Vec<R>> {
            let masked = |i: usize, x: &Vec<R>| {
                let kept = x.iter().enumerate();
                kept.map(|(j, x)| {
                    if i / 3 + j / 3 == block {
                        x.clone()
                    } else {
                        x.of(0.0)
                    }
                })
                .collect()
            };
            let rows = self.covariance.iter().enumerate();
            rows.map(|(i, row)| masked(i, row)).collect()
        };
        [Source::E, Source::EWithB, Source::B]
            .into_iter()
            .enumerate()
            .map(|(block, source)| (source, of_block(block)))
            .filter(|(_, covariance)| covariance.iter().flatten().any(|x| !x.is_zero()))
            .map(|(source, covariance)| (source, sandwich(&self.columns, &covariance)))
            .collect()
    }

    /// Independent errors of one standard deviation.
    pub(super) fn deviations(&self) -> Vec<Field<R>> {
        let columns = self.columns.iter().map(field);
        let columns: Vec<_> = columns.collect();
        let deviation = |k| Field {
            e: combine(&columns, |field| &field.e, &self.root, k),
            cb: combine(&columns, |field| &field.cb, &self.root, k),
        };
        (0..columns.len()).map(deviation).collect()
    }

    /// log2 of the largest error, or a little more.
    pub(super) fn size(&self) -> i64 {
        let sizes = self.columns.iter().enumerate().filter_map(|(i, column)| {
            let column = column.iter().filter_map(R::exponent).max()?;
            Some(column + half(self.covariance[i][i].exponent()?))
        });
        sizes.max().map_or(i64::MIN / 2, |size| size + 4)
    }
}
