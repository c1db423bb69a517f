//! Series as Arrow IPC streams: the same numbers as in the other formats, foreign columns
//! untouched, bounds on what is held.

use std::sync::Arc;

use arrow_array::cast::AsArray;
use arrow_array::types::{Float64Type, Int32Type};
use arrow_array::{
    Array, ArrayRef, DictionaryArray, Float32Array, Float64Array, Int64Array, ListArray,
    RecordBatch, StringArray, TimestampMicrosecondArray,
};
use arrow_ipc::reader::StreamReader;
use arrow_ipc::writer::StreamWriter;
use arrow_select::concat::concat_batches;
use lodeframe::series::{Format, Intake, Limits, Outlet, Refusal, Series};

use crate::series::series;

pub(crate) const LIMITS: Limits = Limits {
    row: 4096,
    batch: 1 << 20,
};

pub(crate) type Column = (&'static str, ArrayRef);

pub(crate) fn doubles(values: Vec<f64>) -> ArrayRef {
    Arc::new(Float64Array::from(values))
}

/// A stream of one batch, given so many times.
pub(crate) fn stream(columns: Vec<Column>, times: usize) -> Vec<u8> {
    let batch = RecordBatch::try_from_iter(columns).expect("columns of one length");
    let mut bytes = Vec::new();
    let mut writer = StreamWriter::try_new(&mut bytes, &batch.schema()).unwrap();
    for _ in 0..times {
        writer.write(&batch).unwrap();
    }
    writer.finish().unwrap();
    drop(writer);
    bytes
}

pub(crate) fn batches(bytes: &[u8]) -> Vec<RecordBatch> {
    // The end, which the reader does not insist on.
    assert!(bytes.ends_with(&[0xff, 0xff, 0xff, 0xff, 0, 0, 0, 0]));
    let reader = StreamReader::try_new(bytes, None).expect("a schema");
    reader.map(|batch| batch.expect("a batch")).collect()
}

pub(crate) fn answer(
    series: Series,
    formats: [Format; 2],
    bytes: &[u8],
    piece: usize,
) -> Result<Vec<u8>, Refusal> {
    let mut outlet = Outlet::new(&series, formats[1]);
    let mut intake = Intake::new(Arc::new(series), formats[0], formats[1], LIMITS);
    let mut answer = Vec::new();
    for piece in bytes.chunks(piece) {
        intake.push(piece);
        while let Some(job) = intake.job(1)? {
            answer.extend(outlet.accept(job.run()).concat());
        }
    }
    while let Some(job) = intake.last()? {
        answer.extend(outlet.accept(job.run()).concat());
    }
    answer.extend(outlet.end().concat());
    Ok(answer)
}

pub(crate) fn numbers(column: &ArrayRef) -> Vec<Option<f64>> {
    column.as_primitive::<Float64Type>().iter().collect()
}

/// Columns ex to bz and vx to vz of so many rows.
pub(crate) fn motion(rows: usize) -> Vec<Column> {
    let names = ["ex", "ey", "ez", "bx", "by", "bz", "vx", "vy", "vz"];
    let column =
        |i: usize| (0..rows).map(move |row| ((row * 37 + i * 11) % 1000) as f64 * 0.37 - 99.0);
    names
        .into_iter()
        .enumerate()
        .map(|(i, name)| (name, doubles(column(i).collect())))
        .collect()
}

#[test]
fn all_formats_give_the_same_doubles() {
    let rows = 5000;
    let mut columns = motion(rows);
    columns[6].1 = doubles(
        (0..rows)
            .map(|row| {
                if row % 2500 == 7 {
                    4e8
                } else {
                    row as f64 * 1e4
                }
            })
            .collect(),
    );
    let arrow = stream(columns.clone(), 1);
    let from_arrow = answer(series(""), [Format::Arrow; 2], &arrow, 1000).unwrap();
    // A large batch is answered in several.
    let own = batches(&from_arrow);
    assert!(own.len() > 1);
    let own = concat_batches(&own[0].schema(), &own).expect("of one schema");
    assert_eq!(own.num_rows(), rows);
    let mut text = "ex,ey,ez,bx,by,bz,vx,vy,vz\n".to_owned();
    for row in 0..rows {
        let values = columns
            .iter()
            .map(|(_, column)| numbers(column)[row].unwrap());
        text += &values
            .map(|x| format!("{x:?}"))
            .collect::<Vec<_>>()
            .join(",");
        text += "\n";
        if row == 299 {
            break;
        }
    }
    let to_arrow = answer(
        series(""),
        [Format::Csv, Format::Arrow],
        text.as_bytes(),
        777,
    )
    .unwrap();
    let mut at = 0;
    for batch in batches(&to_arrow) {
        for name in ["ex", "ey", "ez", "bx", "by", "bz"] {
            let expected = own
                .column_by_name(name)
                .unwrap()
                .slice(at, batch.num_rows());
            assert_eq!(&expected, batch.column_by_name(name).unwrap(), "{name}");
        }
        at += batch.num_rows();
    }
    assert_eq!(at, 300);
    // And as text.
    let ndjson = answer(
        series("end=off"),
        [Format::Arrow, Format::Ndjson],
        &arrow,
        1 << 20,
    )
    .unwrap();
    let ndjson = String::from_utf8(ndjson).unwrap();
    assert_eq!(ndjson.lines().count(), rows);
    for (row, line) in ndjson.lines().enumerate() {
        let line: serde_json::Value = serde_json::from_str(line).unwrap();
        let ex = numbers(own.column_by_name("ex").unwrap())[row];
        assert_eq!(line["e"][0].as_f64(), ex);
        assert_eq!(row % 2500 == 7, ex.is_none());
        if ex.is_none() {
            assert_eq!(line["row"], row + 1);
        }
    }
    let problems = own.column_by_name("problem").unwrap().as_string::<i32>();
    assert!(
        problems
            .value(7)
            .starts_with("faster_than_light (vx, vy, vz): ")
    );
    assert!(problems.is_null(8));
    assert_eq!(own.schema().fields().last().unwrap().name(), "problem");
}

#[test]
fn any_other_column_passes_through_without_a_copy() {
    let mut columns = motion(600);
    let names: DictionaryArray<Int32Type> = (0..600).map(|i| ["mast", "roof"][i % 2]).collect();
    let lists = ListArray::from_iter_primitive::<Int32Type, _, _>(
        (0..600).map(|i| Some(vec![Some(i), None])),
    );
    columns.insert(0, ("station", Arc::new(names)));
    columns.insert(5, ("counts", Arc::new(lists)));
    columns.push(("velocity_flag", doubles(vec![0.5; 600])));
    let question = stream(columns.clone(), 3);
    // Cut so that a batch is one piece of the input or many.
    for piece in [1 << 20, 100] {
        let answered = answer(series(""), [Format::Arrow; 2], &question, piece).unwrap();
        let answered = batches(&answered);
        assert_eq!(answered.len(), 3);
        for batch in answered {
            for name in ["station", "counts", "velocity_flag", "vx"] {
                let own = columns.iter().find(|(own, _)| *own == name).unwrap();
                assert_eq!(&own.1, batch.column_by_name(name).unwrap(), "{name}");
            }
            let order: Vec<String> = batch
                .schema()
                .fields()
                .iter()
                .map(|field| field.name().clone())
                .collect();
            let expected = columns.iter().map(|(name, _)| *name).chain(["problem"]);
            assert_eq!(order, expected.collect::<Vec<_>>());
        }
    }
    // In process the buffer that leaves is the one that came.
    let series = series("");
    let mut outlet = Outlet::new(&series, Format::Arrow);
    let mut intake = Intake::new(Arc::new(series), Format::Arrow, Format::Arrow, LIMITS);
    intake.push(&question);
    let job = intake.job(1).unwrap().expect("a batch");
    let pieces = outlet.accept(job.run());
    let flags = 0.5f64.to_le_bytes().repeat(600);
    let same = pieces
        .iter()
        .find(|piece| piece.starts_with(&flags))
        .expect("the column");
    assert_eq!(same.len(), flags.len());
    let table = answer(
        crate::series::series("keep=station,counts"),
        [Format::Arrow, Format::Csv],
        &question,
        999,
    )
    .unwrap();
    let table = String::from_utf8(table).unwrap();
    assert!(table.starts_with("ex,ey,ez,bx,by,bz,station,counts,problem\r\n"));
    assert!(
        table.lines().nth(2).unwrap().ends_with(",roof,\"[1, ]\","),
        "{:?}",
        table.lines().nth(2)
    );
}

#[test]
fn numbers_of_any_type_and_missing_ones_are_read() {
    let columns: Vec<Column> = vec![
        (
            "ex",
            Arc::new(Int64Array::from(vec![Some(1), None, Some(3)])),
        ),
        (
            "ey",
            Arc::new(Float32Array::from(vec![0.5, 0.25, f32::NAN])),
        ),
        ("ez", doubles(vec![0.0, 1.0, f64::INFINITY])),
    ];
    let question = stream(columns, 1);
    let answered = answer(
        series("rotation.axis=0,0,1&rotation.angle=0"),
        [Format::Arrow; 2],
        &question,
        50,
    )
    .unwrap();
    let batch = &batches(&answered)[0];
    assert_eq!(numbers(batch.column(0)), [Some(1.0), None, None]);
    assert_eq!(numbers(batch.column(1)), [Some(0.5), Some(0.25), None]);
    assert_eq!(numbers(batch.column(2)), [Some(0.0), Some(1.0), None]);
    let problems = batch.column(3).as_string::<i32>();
    assert!(
        problems.value(2).starts_with("number_out_of_range"),
        "{}",
        problems.value(2)
    );
    let stopped = answer(
        series("rotation.axis=0,0,1&rotation.angle=0&on_error=stop"),
        [Format::Arrow; 2],
        &question,
        50,
    );
    assert_eq!(batches(&stopped.unwrap())[0].num_rows(), 3);
}

#[test]
fn times_are_timestamps_or_seconds() {
    use lodeframe::frames::{Clock, Time};
    let text = "2031-03-02T05:10:00.250001Z";
    let own = Time::from_rfc3339(text).unwrap();
    assert_eq!(Time::from_ticks(1_930_194_600_250_001, 1_000_000), own);
    assert_eq!(own.display(Clock::Calendar), text);
    assert_eq!(
        Time::from_ticks(-1_500, 1_000),
        Time::from_rfc3339("1969-12-31T23:59:58.5Z").unwrap()
    );
    // The demonstration counts seconds.
    let field = |name| (name, doubles(vec![1.0, 2.0]));
    let mut columns = vec![("time", doubles(vec![70.0, 1e9]))];
    columns.extend(["ex", "ey", "ez", "bx", "by", "bz"].map(field));
    let answered = answer(
        series("from=payload&to=ground"),
        [Format::Arrow, Format::Ndjson],
        &stream(columns.clone(), 1),
        99,
    );
    let answered = String::from_utf8(answered.unwrap()).unwrap();
    let rows: Vec<serde_json::Value> = answered
        .lines()
        .map(|line| serde_json::from_str(line).unwrap())
        .collect();
    assert_eq!(rows[0]["time"], 70.0);
    assert!(rows[0]["e"][0].is_number());
    assert_eq!(rows[1]["problem"]["type"], "/problems/time_outside_track");
    columns[0].1 = Arc::new(TimestampMicrosecondArray::from(vec![0, 1]).with_timezone("UTC"));
    assert_eq!(
        refused("from=payload&to=ground", &stream(columns, 1)),
        ["wrong_type time"]
    );
}

pub(crate) fn refused(query: &str, bytes: &[u8]) -> Vec<String> {
    let refusal = answer(series(query), [Format::Arrow; 2], bytes, 64).expect_err("a refusal");
    let each = refusal.faults.iter().map(|fault| {
        let place = fault.path.as_ref().map(|path| path.parameter());
        format!("{} {}", fault.code, place.unwrap_or_default())
    });
    each.collect()
}

#[test]
fn wrong_streams_are_refused() {
    let way = "velocity=1,0,0";
    let good = stream(motion(10).into_iter().take(6).collect(), 2);
    assert!(answer(series(way), [Format::Arrow; 2], &good, 1).is_ok());
    assert_eq!(refused(way, b"PAR1"), ["syntax "]);
    assert_eq!(refused(way, b"ARROW1\0\0 a file"), ["syntax "]);
    assert_eq!(refused(way, b""), ["syntax "]);
    assert_eq!(refused(way, &good[..good.len() - 100]), ["syntax "]);
    assert_eq!(refused(way, &[&good[..], &[1]].concat()), ["syntax "]);
    assert_eq!(
        refused(way, &stream(motion(10), 1)),
        [
            "conflicting_fields vx",
            "conflicting_fields vy",
            "conflicting_fields vz"
        ]
    );
    assert_eq!(
        refused(way, &stream(motion(10)[1..6].to_vec(), 1)),
        ["missing_field ex"]
    );
    let mut texts = motion(2);
    texts[1].1 = Arc::new(StringArray::from(vec!["1", "2"]));
    assert_eq!(refused("", &stream(texts, 1)), ["wrong_type ey"]);
    // A length that no stream has is not believed.
    let huge = [&[0xff; 4][..], &u32::MAX.to_le_bytes(), b"xxxx"].concat();
    assert_eq!(refused(way, &huge), ["batch_too_large "]);
    assert_eq!(
        refused("", &stream(motion(100_000), 1)),
        ["batch_too_large "]
    );
    // Whatever a byte becomes, there is an answer or a refusal.
    for at in (0..good.len()).step_by(5) {
        let mut bytes = good.clone();
        bytes[at] ^= 0x55;
        let _ = answer(series(way), [Format::Arrow; 2], &bytes, 4096);
    }
}

#[test]
fn a_stream_without_rows_has_its_columns() {
    let empty = stream(motion(0), 0);
    for answered in [
        answer(series(""), [Format::Arrow; 2], &empty, 9).unwrap(),
        answer(
            series(""),
            [Format::Csv, Format::Arrow],
            b"ex,ey,ez,bx,by,bz,vx,vy,vz\n",
            9,
        )
        .unwrap(),
        answer(series(""), [Format::Ndjson, Format::Arrow], b"\n", 9).unwrap(),
    ] {
        let reader = StreamReader::try_new(&answered[..], None).expect("a schema");
        assert!(reader.schema().field_with_name("problem").is_ok());
        assert_eq!(
            batches(&answered)
                .iter()
                .map(RecordBatch::num_rows)
                .sum::<usize>(),
            0
        );
    }
    let table = answer(series(""), [Format::Arrow, Format::Csv], &empty, 9).unwrap();
    assert_eq!(table, b"ex,ey,ez,bx,by,bz,problem\r\n");
}
