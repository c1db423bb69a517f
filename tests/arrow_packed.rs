//! Arrow streams whose buffers are compressed (`BodyCompression` of the Arrow IPC format).

use std::sync::Arc;

use arrow_array::types::Int32Type;
use arrow_array::{ArrayRef, DictionaryArray, RecordBatch};
use arrow_ipc::CompressionType;
use arrow_ipc::writer::{IpcWriteOptions, StreamWriter};
use lodeframe::series::{Format, Intake};

use crate::arrow::{Column, LIMITS, answer, doubles, motion, refused, stream};
use crate::series::series;

const CODECS: [CompressionType; 2] = [CompressionType::LZ4_FRAME, CompressionType::ZSTD];

/// A stream of one batch, given so many times, packed.
fn packed(codec: CompressionType, columns: Vec<Column>, times: usize) -> Vec<u8> {
    let batch = RecordBatch::try_from_iter(columns).expect("columns of one length");
    let options = IpcWriteOptions::default().try_with_compression(Some(codec));
    let options = options.expect("a codec that is built in");
    let mut bytes = Vec::new();
    let mut writer =
        StreamWriter::try_new_with_options(&mut bytes, &batch.schema(), options).unwrap();
    for _ in 0..times {
        writer.write(&batch).unwrap();
    }
    writer.finish().unwrap();
    drop(writer);
    bytes
}

fn columns(rows: usize) -> Vec<Column> {
    let names: Vec<&str> = (0..rows).map(|row| ["mast", "roof"][row % 2]).collect();
    let station: DictionaryArray<Int32Type> = names.into_iter().collect();
    let station: ArrayRef = Arc::new(station);
    motion(rows)
        .into_iter()
        .chain([("station", station)])
        .collect()
}

#[test]
fn packed_batches_are_answered_as_plain_ones() {
    let plain = stream(columns(700), 3);
    for format in [Format::Arrow, Format::Csv] {
        let formats = [Format::Arrow, format];
        let expected = answer(series("velocity=row"), formats, &plain, 4096).expect("an answer");
        for codec in CODECS {
            let bytes = packed(codec, columns(700), 3);
            assert!(bytes.len() < plain.len(), "{codec:?}");
            for piece in [1, 999, usize::MAX] {
                let found = answer(series("velocity=row"), formats, &bytes, piece);
                assert!(found.expect("an answer") == expected, "{codec:?} {piece}");
            }
        }
    }
}

#[test]
fn what_a_batch_unpacks_to_is_bounded() {
    let zeros = |rows: usize| -> Vec<Column> {
        motion(0)
            .into_iter()
            .map(|(name, _)| (name, doubles(vec![0.0; rows])))
            .collect()
    };
    for codec in CODECS {
        // 9 columns of 8 bytes: 720 kB, and 1.4 MB where one is allowed.
        let small = packed(codec, zeros(10_000), 1);
        assert!(small.len() < 20_000, "{}", small.len());
        assert!(answer(series(""), [Format::Arrow; 2], &small, 4096).is_ok());
        assert_eq!(
            refused("", &packed(codec, zeros(20_000), 1)),
            ["batch_too_large "]
        );
    }
}

#[test]
fn one_batch_at_a_time_is_unpacked() {
    // All of them come in one piece, of which no more is held than that.
    let bytes = packed(CompressionType::ZSTD, columns(1000), 40);
    let formats = [Format::Arrow, Format::Csv];
    let mut intake = Intake::new(
        Arc::new(series("velocity=row")),
        formats[0],
        formats[1],
        LIMITS,
    );
    intake.push(&bytes);
    let mut jobs = 0;
    while intake.is_packed() {
        assert!(intake.is_full());
        assert!(intake.job(1).expect("no refusal").is_some());
        jobs += 1;
    }
    assert_eq!(jobs, 40);
    assert!(intake.last().expect("a proper end").is_none());
}

#[test]
fn buffers_that_lie_about_themselves_are_refused() {
    for codec in CODECS {
        let good = packed(codec, motion(40), 1);
        assert!(answer(series(""), [Format::Arrow; 2], &good, 4096).is_ok());
        // Before each column of 40 doubles stands how many bytes they are.
        let says = 320i64.to_le_bytes();
        let place = good.windows(8).rposition(|bytes| bytes == says);
        let place = place.expect("a column");
        for (lie, code) in [
            (319, "syntax "),
            (321, "syntax "),
            (-7, "syntax "),
            (2_000_000, "batch_too_large "),
            (i64::MAX, "batch_too_large "),
        ] {
            let mut bytes = good.clone();
            bytes[place..place + 8].copy_from_slice(&i64::to_le_bytes(lie));
            assert_eq!(refused("", &bytes), [code], "{codec:?} {lie}");
        }
        // Whatever a byte becomes, there is an answer or a refusal.
        for at in (0..good.len()).step_by(11) {
            let mut bytes = good.clone();
            bytes[at] ^= 0x55;
            let _ = answer(series(""), [Format::Arrow; 2], &bytes, 4096);
        }
    }
}
