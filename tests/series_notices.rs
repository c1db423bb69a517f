//! Notices in a series: the codes of single readings, in a column that is there only where the
//! question can give some.

use std::path::Path;
use std::sync::Arc;

use arrow_array::cast::AsArray;
use arrow_array::{Array, ArrayRef, Float64Array};
use lodeframe::document::{Node, from_query};
use lodeframe::question::{Deployment, Question};
use lodeframe::series::{Format, Limits, Series, run};
use lodeframe::{answer::Answer, frames};
use serde_json::{Value, json};

use crate::arrow;
use crate::series::{CSV, NDJSON, answer, lines, refused, series, single};

const ASSUMED: &str = "velocity=row&assume.e_dot_b_zero.min_angle=15&units.angle=deg";

/// A component to fill, a whole field, one that stays missing, a weak B, an implant's worth of B
/// and a field whose terms cancel.
fn rows() -> Vec<Value> {
    vec![
        json!({"e": [3, -4, null], "b": [1e-9, 2e-9, 8e-9], "velocity": [0, 0, 0]}),
        json!({"e": [3, -4, 1], "b": [1e-9, 2e-9, 8e-9], "velocity": [1, 2, 3]}),
        json!({"e": [3, null, null], "b": [1e-9, 2e-9, 8e-9], "velocity": [1, 2, 3]}),
        json!({"e": [3, -4, null], "b": [1e-9, 2e-9, 1e-12], "velocity": [1, 2, 3]}),
        json!({"e": [null, -4, 3], "b": [8, 2, 1], "velocity": [1, 2, 3]}),
        json!({"e": [0, 360, 0], "b": [0, 0, 45], "velocity": [8, 0, 0]}),
    ]
}

/// The codes of the notices of a single reading, each once.
fn codes(answer: &Answer) -> Vec<String> {
    let mut codes: Vec<String> = answer.notices.iter().map(|n| n.code.to_string()).collect();
    codes.dedup();
    codes
}

#[test]
fn rows_have_the_notices_of_single_readings_in_both_text_formats() {
    let mut expected = Vec::new();
    let (mut ndjson, mut table) = (String::new(), "ex,ey,ez,bx,by,bz,vx,vy,vz\n".to_owned());
    for row in rows() {
        ndjson += &format!("{row}\n");
        let cell = |x: &Value| {
            if x.is_null() {
                String::new()
            } else {
                x.to_string()
            }
        };
        let vectors = ["e", "b", "velocity"].map(|name| row[name].as_array().unwrap().clone());
        let cells: Vec<String> = vectors.iter().flatten().map(cell).collect();
        table += &format!("{}\n", cells.join(","));
        let mut question = row.clone();
        question["units"] = json!({"angle": "deg"});
        question["assume"] = json!({"e_dot_b_zero": {"min_angle": 15}});
        // One of them is refused.
        let weak = row["b"][2] == 1e-12;
        expected.push(if weak {
            None
        } else {
            Some(codes(&single(&question)))
        });
    }
    let some = |codes: &[&str]| {
        Some(
            codes
                .iter()
                .map(|code| code.to_string())
                .collect::<Vec<_>>(),
        )
    };
    assert_eq!(expected[0], some(&["e_dot_b_assumed"]));
    assert_eq!(expected[1], some(&[]));
    assert_eq!(expected[2], some(&["missing_component"]));
    assert_eq!(expected[4], some(&["e_dot_b_assumed", "strong_field"]));
    assert_eq!(expected[5], some(&["heavy_cancellation", "strong_field"]));
    for (format, text) in [(NDJSON, &ndjson), (CSV, &table)] {
        let answered = lines(&answer(ASSUMED, [format, NDJSON], text));
        for (row, expected) in answered.iter().zip(&expected) {
            match expected {
                Some(codes) if codes.is_empty() => assert_eq!(row["notices"], Value::Null),
                Some(codes) => assert_eq!(row["notices"], json!(codes)),
                None => {
                    assert_eq!(row["problem"]["type"], "/problems/field_in_plane");
                    assert_eq!(row["notices"], Value::Null);
                }
            }
        }
        let answered = answer(ASSUMED, [format, CSV], text);
        let mut reader = csv::Reader::from_reader(answered.as_bytes());
        let header = reader.headers().unwrap().clone();
        let last: Vec<&str> = header.iter().skip(header.len() - 2).collect();
        assert_eq!(last, ["notices", "problem"]);
        for (row, expected) in reader.records().zip(&expected) {
            let row = row.expect("a row");
            let codes = expected.clone().unwrap_or_default();
            assert_eq!(&row[row.len() - 2], codes.join(" "));
            assert_eq!(row[row.len() - 1].is_empty(), expected.is_some());
        }
    }
}

#[test]
fn nothing_is_added_where_nothing_is_assumed() {
    let text = "notices,ex,ey,ez,bx,by,bz\nmine,3,-4,,1,2,8\n";
    assert_eq!(
        answer("velocity=0,0,0", [CSV, CSV], text),
        "notices,ex,ey,ez,bx,by,bz,problem\nmine,3.0,-4.0,,1.0,2.0,8.0,\n"
    );
    let row = "{\"notices\":[1],\"e\":[3,-4,null],\"b\":[1,2,8]}";
    let answered = answer("velocity=0,0,0&end=off", [NDJSON, NDJSON], row);
    assert_eq!(
        answered,
        "{\"notices\":[1],\"e\":[3.0,-4.0,null],\"b\":[1.0,2.0,8.0]}\n"
    );
    // Where some are given, the name is ours.
    let query = "velocity=0,0,0&assume.e_dot_b_zero.min_angle=0.1";
    let at = ("unknown_field".to_owned(), "notices".to_owned());
    assert_eq!(refused(query, text), [at]);
    let bad = &lines(&answer(query, [NDJSON, NDJSON], row))[0];
    assert_eq!(bad["problem"]["errors"][0]["pointer"], "/notices");
}

#[test]
fn a_row_with_a_way_of_its_own_has_them_too() {
    let own = "{\"e\":[3,-4,null],\"b\":[1,2,8],\"rotation\":{\"axis\":[0,0,1],\"angle\":0}}\n";
    let plain = "{\"e\":[3,-4,null],\"b\":[1,2,8],\"velocity\":[0,0,0]}\n";
    let query = "assume.e_dot_b_zero.min_angle=0.1";
    for text in [[own, plain, own].concat(), [plain, own, plain].concat()] {
        for row in &lines(&answer(query, [NDJSON, NDJSON], &text))[..3] {
            assert_eq!(row["e"][2], 0.625);
            assert_eq!(row["notices"], json!(["e_dot_b_assumed", "strong_field"]));
        }
    }
}

/// A deployment whose catalogue goes on past the end of a track.
fn extrapolating() -> Deployment {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("series_notices");
    std::fs::create_dir_all(&folder).expect("a folder for test files");
    let catalogue = "epoch = \"T0\"\n[frames.ground]\n[frames.moving]\nparent = \"ground\"\n\
                     track = \"track.csv\"\nmax_gap = 10\nextrapolate = true\n";
    let track = "time,vx,vy,vz,qw,qx,qy,qz\n0,0,0,0,1,0,0,0\n10,10,0,0,1,0,0,0\n";
    std::fs::write(folder.join("frames.toml"), catalogue).expect("a test file");
    std::fs::write(folder.join("track.csv"), track).expect("a test file");
    let catalogue = frames::load(&folder.join("frames.toml"));
    Deployment {
        steps: 100,
        trials: 100_000,
        frames: Some(Arc::new(
            catalogue.unwrap_or_else(|_| panic!("a catalogue")),
        )),
    }
}

#[test]
fn an_extrapolated_time_is_said_of_its_row() {
    let deployment = extrapolating();
    let asked = |query: &str, formats: [Format; 2], text: &str| -> String {
        let node = from_query(query).expect("a query");
        let series = Series::read(node, &deployment).unwrap_or_else(|f| panic!("{f:?}"));
        let limits = Limits {
            row: 4096,
            batch: 1 << 20,
        };
        let mut answer = Vec::new();
        run(series, formats, limits, 1, text.as_bytes(), &mut answer).expect("an answer");
        String::from_utf8(answer).expect("UTF-8")
    };
    let table = "time,ex,ey,ez,bx,by,bz\n5,0,0,0,0,0,0\n12.5,0,0,0,0,0,0\n";
    let answered = asked("from=ground&to=moving", [CSV, CSV], table);
    let mut reader = csv::Reader::from_reader(answered.as_bytes());
    let noted: Vec<String> = reader
        .records()
        .map(|row| row.unwrap()[7].to_owned())
        .collect();
    assert_eq!(noted, ["", "extrapolated_time"]);
    // As in a single reading, and for rows that name frames themselves.
    let own =
        json!({"from": "ground", "to": "moving", "time": 12.5, "e": [0, 0, 0], "b": [0, 0, 0]});
    let text = own.to_string();
    let node = Node::from_json(text.as_bytes()).expect("JSON");
    let question = Question::read(&node, &deployment).expect("a question");
    assert_eq!(
        codes(&Answer::to(&question).expect("an answer")),
        ["extrapolated_time"]
    );
    for query in ["", "assume.e_dot_b_zero.min_angle=0.1"] {
        let row = &lines(&asked(query, [NDJSON, NDJSON], &text))[0];
        assert_eq!(row["notices"], json!(["extrapolated_time"]), "{query}");
    }
    let answered = asked("", [NDJSON, CSV], &text);
    assert!(answered.ends_with(",extrapolated_time,\r\n"), "{answered}");
    // A table cannot name frames: its usual answer has no such column.
    let answered = asked(
        "",
        [CSV, CSV],
        "bx,by,bz,ex,ey,ez,vx,vy,vz\n0,0,0,0,0,0,0,0,0\n",
    );
    assert!(
        answered.starts_with("bx,by,bz,ex,ey,ez,vx,vy,vz,problem\n"),
        "{answered}"
    );
}

#[test]
fn notices_and_uncertainties_of_the_query_are_columns_before_the_problem() {
    let gap: ArrayRef = Arc::new(Float64Array::from(vec![None, Some(1.0), None]));
    let three = |x: f64| arrow::doubles(vec![x; 3]);
    let columns = vec![
        ("ex", three(3.0)),
        ("ey", three(-4.0)),
        ("ez", gap),
        ("bx", three(1.0)),
        ("by", three(2.0)),
        ("bz", arrow::doubles(vec![8.0, 8.0, f64::NAN])),
    ];
    let bytes = arrow::stream(columns, 2);
    let query = "velocity=0,0,0&uncertainty.velocity=2,0,0&assume.e_dot_b_zero.min_angle=0.1";
    let arrow = arrow::answer(series(query), [Format::Arrow; 2], &bytes, 999).expect("an answer");
    let csv =
        arrow::answer(series(query), [Format::Arrow, Format::Csv], &bytes, 999).expect("an answer");
    let table = b"ex,ey,ez,bx,by,bz\n3,-4,,1,2,8\n3,-4,1,1,2,8\n3,-4,,1,2,\n";
    let back = [Format::Csv, Format::Arrow];
    let back = arrow::answer(series(query), back, table, 4096).expect("an answer");
    let names = [
        "ex", "ey", "ez", "bx", "by", "bz", "u_ex", "u_ey", "u_ez", "u_bx", "u_by", "u_bz",
        "notices", "problem",
    ];
    for batch in arrow::batches(&arrow).iter().chain(&arrow::batches(&back)) {
        let schema = batch.schema();
        let own: Vec<&str> = schema
            .fields()
            .iter()
            .map(|field| field.name().as_str())
            .collect();
        assert_eq!(own, names);
        // With v = (±2, 0, 0) m/s beside B = (1, 2, 8) T, E' is off by v×B = (0, -16, 4) V/m.
        assert_eq!(arrow::numbers(&batch.columns()[7])[1], Some(16.0));
        assert_eq!(arrow::numbers(&batch.columns()[8])[1], Some(4.0));
        let notices = batch.columns()[12].as_string::<i32>();
        let notices: Vec<Option<&str>> = notices.iter().collect();
        let strong = "strong_field";
        assert_eq!(
            notices,
            [
                Some("e_dot_b_assumed strong_field"),
                Some(strong),
                Some("missing_component strong_field")
            ]
        );
        assert_eq!(batch.columns()[13].null_count(), 3);
    }
    let text = String::from_utf8(csv).expect("UTF-8");
    let header = text.lines().next().expect("a header");
    assert_eq!(header, names.join(","));
    assert_eq!(text.lines().count(), 7);
    let filled = text.lines().nth(1).expect("a row");
    assert!(
        filled.ends_with(",e_dot_b_assumed strong_field,"),
        "{filled}"
    );
}
