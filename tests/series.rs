//! A series in process: the same rows give the same bits as single readings, in every format.

use std::fmt::Write;
use std::sync::Arc;

use lodeframe::answer::Answer;
use lodeframe::document::{Node, from_query};
use lodeframe::question::{Deployment, Question};
use lodeframe::series::{Counts, Format, Intake, Limits, Outlet, Refusal, Series, run};
use serde_json::{Value, json};

pub(crate) const NDJSON: Format = Format::Ndjson;
pub(crate) const CSV: Format = Format::Csv;
const LIMITS: Limits = Limits {
    row: 4096,
    batch: 1 << 20,
};

pub(crate) fn deployment() -> Deployment {
    let file = concat!(env!("CARGO_MANIFEST_DIR"), "/deploy/demo/frames.toml");
    let catalogue = lodeframe::frames::load(std::path::Path::new(file));
    Deployment {
        steps: 100,
        trials: 100_000,
        frames: Some(Arc::new(catalogue.expect("the demonstration is right"))),
    }
}

pub(crate) fn series(query: &str) -> Series {
    let node = from_query(query).expect("a query");
    Series::read(node, &deployment()).unwrap_or_else(|faults| panic!("{query}: {faults:?}"))
}

/// The whole answer, when the question comes in pieces of so many bytes.
pub(crate) fn in_pieces(
    query: &str,
    [input, output]: [Format; 2],
    text: &[u8],
    piece: usize,
) -> (String, Option<Refusal>) {
    let series = series(query);
    let mut outlet = Outlet::new(&series, output);
    let mut intake = Intake::new(Arc::new(series), input, output, LIMITS);
    let mut answer = Vec::new();
    let mut accept = |job| {
        let job: Option<lodeframe::series::Job> = job?;
        if let Some(job) = job {
            answer.extend(outlet.accept(job.run()).concat());
        }
        Ok(())
    };
    let mut all = || {
        for piece in text.chunks(piece) {
            intake.push(piece);
            accept(intake.job(1))?;
        }
        accept(intake.last())
    };
    let refusal = all().err();
    if refusal.is_none() {
        answer.extend(outlet.end().concat());
    }
    (String::from_utf8(answer).expect("UTF-8"), refusal)
}

#[track_caller]
pub(crate) fn answer(query: &str, formats: [Format; 2], text: &str) -> String {
    let (whole, refusal) = in_pieces(query, formats, text.as_bytes(), usize::MAX);
    assert!(refusal.is_none(), "{refusal:?}");
    // Wherever the bytes are cut, the answer is the same.
    for piece in [1, 7, 64] {
        let (again, _) = in_pieces(query, formats, text.as_bytes(), piece);
        assert_eq!(again, whole, "in pieces of {piece}");
    }
    whole
}

/// The codes and columns of what a header is refused for.
pub(crate) fn refused(query: &str, text: &str) -> Vec<(String, String)> {
    let (_, refusal) = in_pieces(query, [CSV, CSV], text.as_bytes(), 5);
    let faults = refusal.expect("a refusal").faults;
    let each = faults.iter().map(|fault| {
        let column = fault.path.as_ref().map(|path| path.parameter());
        (fault.code.to_string(), column.unwrap_or_default())
    });
    each.collect()
}

pub(crate) fn single(question: &Value) -> Answer {
    let text = question.to_string();
    let node = Node::from_json(text.as_bytes()).expect("JSON");
    let question =
        Question::read(&node, &deployment()).unwrap_or_else(|faults| panic!("{faults:?}"));
    Answer::to(&question).expect("an answer")
}

/// Doubles of all sizes and signs; the generator of Numerical Recipes, from memory.
struct Random(u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        self.0 ^ (self.0 >> 29)
    }

    /// Between −1 and 1 times a power of ten.
    fn number(&mut self, digits: i32) -> f64 {
        let size = 10f64.powi((self.next() % 13) as i32 - 6 + digits);
        (self.next() >> 11) as f64 / (1u64 << 52) as f64 * size - size
    }

    fn vector(&mut self, digits: i32) -> [f64; 3] {
        std::array::from_fn(|_| self.number(digits))
    }
}

pub(crate) fn lines(text: &str) -> Vec<Value> {
    let each = text
        .lines()
        .map(|line| serde_json::from_str(line).unwrap_or_else(|error| panic!("{error}: {line}")));
    each.collect()
}

#[test]
fn rows_have_the_bits_of_single_readings_in_both_formats() {
    let mut random = Random(7);
    let units = json!({"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"});
    let query_units = "units.e=mV/m&units.b=nT&units.velocity=km/s&units.angle=deg";
    let fixed = json!([{"rotate": {"axis": [1, 2, 2], "angle": 40}}, {"boost": {"velocity": [3000, 40, -5]}}]);
    let ways = [
        ("velocity=row".to_owned(), json!([{"boost": {"velocity": "row"}}])),
        ("boost.velocity=row&boost.inverse=true".to_owned(), json!([{"boost": {"velocity": "row", "inverse": true}}])),
        (format!("steps={fixed}"), fixed.clone()),
        (
            "inverse=true&steps=[{\"rotate\":{\"axis\":[0,0,1],\"angle\":20}},{\"boost\":{\"velocity\":\"row\"}},{\"rotate\":{\"axis\":[0,0,1],\"angle\":\"row\"}},{\"boost\":{\"velocity\":[1000,0,0]}}]".to_owned(),
            json!([{"boost": {"velocity": [1000, 0, 0], "inverse": true}},
                   {"rotate": {"axis": [0, 0, 1], "angle": "row", "inverse": true}},
                   {"boost": {"velocity": "row", "inverse": true}},
                   {"rotate": {"axis": [0, 0, 1], "angle": 20, "inverse": true}}]),
        ),
        (
            "rotation.quaternion=row&rotation.inverse=true".to_owned(),
            json!([{"rotate": {"quaternion": "row", "inverse": true}}]),
        ),
    ];
    for (way, steps) in &ways {
        let takes = |what: &str| steps.to_string().contains(&format!("\"{what}\":\"row\""));
        let mut ndjson = String::new();
        let mut csv = "time,ex,ey,ez,bx,by,bz".to_owned();
        for (name, columns) in [
            ("velocity", ",vx,vy,vz"),
            ("angle", ",angle"),
            ("quaternion", ",qw,qx,qy,qz"),
        ] {
            csv += if takes(name) { columns } else { "" };
        }
        csv += ",station\n";
        let mut expected = Vec::new();
        for i in 0..60 {
            let (e, b, v) = (random.vector(0), random.vector(3), random.vector(-2));
            let angle = random.number(1);
            let (sin, cos) = angle.sin_cos();
            let quaternion = json!({"w": cos, "x": 0.6 * sin, "y": 0.0, "z": 0.8 * sin});
            let mut row = json!({"time": i, "e": e, "b": b, "station": "A"});
            write!(csv, "{i}").unwrap();
            for x in e.iter().chain(&b) {
                write!(csv, ",{x:?}").unwrap();
            }
            if takes("velocity") {
                row["velocity"] = json!(v);
                write!(csv, ",{:?},{:?},{:?}", v[0], v[1], v[2]).unwrap();
            }
            if takes("angle") {
                row["angle"] = json!(angle);
                write!(csv, ",{angle:?}").unwrap();
            }
            if takes("quaternion") {
                row["rotation"] = json!({"quaternion": quaternion});
                for name in ["w", "x", "y", "z"] {
                    write!(csv, ",{}", quaternion[name]).unwrap();
                }
            }
            csv += ",A\n";
            writeln!(ndjson, "{row}").unwrap();
            let own = steps
                .to_string()
                .replace(
                    "\"velocity\":\"row\"",
                    &format!("\"velocity\":{}", json!(v)),
                )
                .replace("\"angle\":\"row\"", &format!("\"angle\":{}", json!(angle)))
                .replace(
                    "\"quaternion\":\"row\"",
                    &format!("\"quaternion\":{quaternion}"),
                );
            let own: Value = serde_json::from_str(&own).unwrap();
            expected.push(single(
                &json!({"e": e, "b": b, "units": units, "steps": own}),
            ));
        }
        let query = format!("{query_units}&{way}&end=off");
        let answered = lines(&answer(&query, [NDJSON, NDJSON], &ndjson));
        assert_eq!(answered.len(), expected.len());
        for (row, expected) in answered.iter().zip(&expected) {
            assert_eq!(row["e"], json!(expected.e), "{way}");
            assert_eq!(row["b"], json!(expected.b), "{way}");
            assert_eq!(row["station"], "A");
        }
        // The same through a table, and from each format to the other.
        let table = lines(&answer(
            &format!("{query}&keep=station"),
            [CSV, NDJSON],
            &csv,
        ));
        for (row, expected) in table.iter().zip(&expected) {
            assert_eq!(
                (&row["e"], &row["b"]),
                (&json!(expected.e), &json!(expected.b))
            );
            assert_eq!(row["station"], "A");
        }
        let numbers = |text: &str| -> Vec<Vec<String>> {
            let mut reader = csv::Reader::from_reader(text.as_bytes());
            let header = reader.headers().unwrap().clone();
            let place = |name: &str| header.iter().position(|own| own == name).unwrap();
            let places = ["time", "ex", "ey", "ez", "bx", "by", "bz", "problem"].map(place);
            let rows = reader.records().map(|row| {
                let row = row.unwrap();
                places.map(|place| row[place].to_owned()).to_vec()
            });
            rows.collect()
        };
        let same = numbers(&answer(&query, [CSV, CSV], &csv));
        assert_eq!(same.len(), expected.len());
        assert_eq!(same, numbers(&answer(&query, [NDJSON, CSV], &ndjson)));
        for (row, expected) in same.iter().zip(&expected) {
            let read: Vec<f64> = row[1..7].iter().map(|x| x.parse().unwrap()).collect();
            let all: Vec<f64> = expected
                .e
                .iter()
                .chain(&expected.b)
                .map(|x| x.unwrap())
                .collect();
            assert_eq!(read, all);
        }
    }
}

#[test]
fn rows_may_bring_any_way_of_their_own() {
    let ways = [
        json!({"velocity": [7.6e3, 0, 0]}),
        json!({"rotation": {"quaternion": {"w": 0.6, "x": 0.0, "y": 0.0, "z": 0.8}}}),
        json!({"rotation": {"axis": [0, 0, 1], "angle": 0.3}}),
        json!({"boost": {"direction": [1, 0, 0], "gamma": 2000}, "inverse": true}),
        json!({"steps": [{"boost": {"beta": [0.1, 0, 0]}}, {"rotate": {"axis": [1, 0, 0], "angle": 1}}]}),
        json!({"from": "payload", "to": "ground", "time": 70.5}),
    ];
    let mut text = String::new();
    let mut expected = Vec::new();
    for way in ways {
        let mut row = json!({"e": [1, 2, 3], "b": [0.1, 0.2, 0.3]});
        for (name, value) in way.as_object().unwrap() {
            row[name] = value.clone();
        }
        writeln!(text, "{row}").unwrap();
        expected.push(single(&row));
    }
    let answered = answer("", [NDJSON, NDJSON], &text);
    let rows = lines(&answered);
    for (row, expected) in rows.iter().zip(&expected) {
        assert_eq!(
            (&row["e"], &row["b"]),
            (&json!(expected.e), &json!(expected.b))
        );
    }
    assert_eq!(
        rows[6],
        json!({"end": {"read": 6, "answered": 6, "refused": 0}})
    );
    let both = r#"{"e":[1,2,3],"b":[1,2,3],"velocity":[1,2,3],"rotation":{"quaternion":{"w":1,"x":0,"y":0,"z":0}}}"#;
    let rows = lines(&answer("", [NDJSON, NDJSON], both));
    assert_eq!(rows[0]["problem"]["type"], "/problems/conflicting_fields");
}

#[test]
fn rows_walk_a_track_at_their_time() {
    let rows = [
        ("120", "0.0151,-0.05,,-1778,-8840,-27539"),
        ("121.25", "-0.009,-0.0504,,-5701,-6964,-27528"),
        ("", "1,2,,3,4,5"),
        ("9e9", "1,2,,3,4,5"),
    ];
    let mut text = "time,ex,ey,ez,bx,by,bz\n".to_owned();
    for (time, field) in rows {
        writeln!(text, "{time},{field}").unwrap();
    }
    let answered = answer(
        "from=boom&to=ground&assume.e_dot_b_zero.min_angle=0.2",
        [CSV, NDJSON],
        &text,
    );
    let answered = lines(&answered);
    let question = |time: f64, e: Value, b: Value| {
        let assume = json!({"e_dot_b_zero": {"min_angle": 0.2}});
        single(
            &json!({"from": "boom", "to": "ground", "time": time, "e": e, "b": b, "assume": assume}),
        )
    };
    let first = question(
        120.0,
        json!([0.0151, -0.05, null]),
        json!([-1778, -8840, -27539]),
    );
    let second = question(
        121.25,
        json!([-0.009, -0.0504, null]),
        json!([-5701, -6964, -27528]),
    );
    for (row, expected) in answered.iter().zip([first, second]) {
        assert_eq!(
            (&row["e"], &row["b"]),
            (&json!(expected.e), &json!(expected.b))
        );
    }
    // Without a time nothing is known, which is no fault; far from the track there is no answer.
    assert_eq!(
        answered[2],
        json!({"e": [null, null, null], "b": [null, null, null]})
    );
    assert_eq!(
        answered[3]["problem"]["type"],
        "/problems/time_outside_track"
    );
    assert_eq!(answered[3]["problem"]["errors"][0]["pointer"], "/time");
    assert_eq!(answered[4]["end"]["refused"], 1);
}

#[test]
fn what_is_not_measured_stays_missing() {
    let text = "{\"b\":[1,2,3]}\n{\"e\":[1,null,3],\"b\":[1,2,3]}\n{\"e\":null,\"b\":null}\n";
    let turned = lines(&answer(
        "rotation.axis=0,0,1&rotation.angle=0",
        [NDJSON, NDJSON],
        text,
    ));
    assert_eq!(turned[0], json!({"b": [1.0, 2.0, 3.0]}));
    assert_eq!(turned[1]["e"], json!([1.0, null, 3.0]));
    assert_eq!(
        turned[2],
        json!({"e": [null, null, null], "b": [null, null, null]})
    );
    let moved = lines(&answer("velocity=1e5,0,0", [NDJSON, NDJSON], text));
    assert_eq!(moved[0], json!({"b": [1.0, null, null]}));
    assert!(moved[1]["b"][1].is_number() && moved[1]["b"][2].is_null());
    // In a table, empty, NaN and null are missing, and so is the answer of a row without motion.
    let table = "ex,ey,ez,bx,by,bz,vx,vy,vz\n1,NaN,3,1,2,3,1e5,0,0\n1,2,3,1,2,3,,0,0\n";
    let answered = answer("", [CSV, CSV], table);
    let rows: Vec<&str> = answered.lines().collect();
    assert!(rows[1].starts_with("1.0,,"), "{}", rows[1]);
    assert_eq!(rows[2], ",,,,,,,0,0,");
}

#[test]
fn a_bad_row_is_answered_in_its_place() {
    let good = "{\"e\":[1,2,3],\"b\":[1,2,3],\"velocity\":[1e5,0,0]}";
    let fast = "{\"id\": 7,\"e\":[1,2,3],\"b\":[1,2,3],\"velocity\":[3e8,0,0], \"note\":\"x\"}";
    let text =
        format!("{good}\n\nnonsense\n{fast}\n[1]\n{{\"e\":[1,2],\"velocity\":[1,2,3]}}\n{good}");
    let rows = lines(&answer("velocity=row", [NDJSON, NDJSON], &text));
    assert_eq!(rows.len(), 7);
    assert_eq!(rows[1]["row"], 2);
    assert_eq!(rows[1]["problem"]["type"], "/problems/syntax");
    assert_eq!(rows[2]["row"], 3);
    assert_eq!((&rows[2]["e"], &rows[2]["b"]), (&Value::Null, &Value::Null));
    assert_eq!((&rows[2]["id"], &rows[2]["note"]), (&json!(7), &json!("x")));
    let problem = &rows[2]["problem"];
    assert_eq!(problem["type"], "/problems/faster_than_light");
    assert_eq!(
        (&problem["status"], &problem["errors"][0]["pointer"]),
        (&json!(422), &json!("/velocity"))
    );
    assert_eq!(rows[3]["problem"]["type"], "/problems/wrong_type");
    assert_eq!(rows[4]["problem"]["errors"][0]["pointer"], "/e");
    assert_eq!(rows[5], rows[0]);
    assert_eq!(
        rows[6],
        json!({"end": {"read": 6, "answered": 2, "refused": 4}})
    );

    let stopped = lines(&answer(
        "velocity=row&on_error=stop",
        [NDJSON, NDJSON],
        &text,
    ));
    assert_eq!(stopped.len(), 3);
    assert_eq!(
        stopped[2],
        json!({"end": {"read": 2, "answered": 1, "refused": 1}})
    );

    let table = "station,ex,ey,ez,bx,by,bz,vx,vy,vz\nA,1,2,3,4,5,6,3e8,0,0\nB,1,2\nC,1,x,1e999,4,5,6,0,0,0\nD,0,0,0,0,0,0,0,0,0\n";
    let answered = answer("", [CSV, CSV], table);
    let rows: Vec<&str> = answered.lines().collect();
    assert!(rows[1].starts_with("A,,,,,,,3e8,0,0,\"faster_than_light (vx, vy, vz): the speed is"));
    assert!(rows[2].starts_with(",,,,,,,,,,wrong_length: the row has 3 fields and the header 10"));
    assert!(
        rows[3].starts_with("C,,,,,,,0,0,0,\"wrong_type (ey): ")
            && rows[3].contains("number_out_of_range (ez)")
    );
    assert_eq!(rows[4], "D,0.0,0.0,0.0,0.0,0.0,0.0,0,0,0,");
}

#[test]
fn slips_are_refused_where_they_stand() {
    let field = "ex,ey,ez,bx,by,bz";
    let column = |code: &str, name: &str| vec![(code.to_owned(), name.to_owned())];
    for (query, header, expected) in [
        (
            "velocity=1,0,0",
            "ey,ez,bx,by,bz".to_owned(),
            column("missing_field", "ex"),
        ),
        (
            "velocity=1,0,0",
            "bx,by,bz".to_owned(),
            column("missing_field", "ex"),
        ),
        (
            "velocity=1,0,0",
            format!("{field},Vx"),
            column("unknown_field", "Vx"),
        ),
        (
            "velocity=1,0,0",
            format!("{field}, time"),
            column("unknown_field", " time"),
        ),
        (
            "velocity=1,0,0",
            format!("{field},problem"),
            column("unknown_field", "problem"),
        ),
        (
            "velocity=1,0,0",
            format!("{field},units"),
            column("unknown_field", "units"),
        ),
        (
            "velocity=1,0,0",
            format!("{field},ex"),
            column("repeated_field", "ex"),
        ),
        (
            "velocity=1,0,0",
            format!("{field},angle"),
            column("conflicting_fields", "angle"),
        ),
        (
            "velocity=row",
            format!("{field},vx,vy"),
            column("missing_field", "vz"),
        ),
        (
            "velocity=row",
            field.to_owned(),
            column("missing_field", "vx"),
        ),
        ("", field.to_owned(), column("missing_field", "")),
        (
            "",
            format!("{field},vx,vy,vz,qw,qx,qy,qz"),
            column("conflicting_fields", ""),
        ),
        (
            "from=payload&to=ground",
            field.to_owned(),
            column("missing_field", "time"),
        ),
        (
            "velocity=1,0,0&keep=mast",
            field.to_owned(),
            column("missing_field", "mast"),
        ),
        ("velocity=1,0,0", String::new(), column("syntax", "")),
    ] {
        assert_eq!(
            refused(query, &format!("{header}\n1,2\n")),
            expected,
            "{query} {header}"
        );
    }
    for (query, name) in [
        ("velocity=1,0,0", "velocity"),
        ("velocity=1,0,0", "E"),
        ("velocity=1,0,0", "vx"),
        ("velocity=1,0,0", "problem"),
        ("rotation.quaternion=row", "angle"),
        ("", "units"),
    ] {
        let row = format!("{{\"e\":[1,2,3],\"b\":[1,2,3],\"{name}\":[1,2,3]}}");
        let rows = lines(&answer(query, [NDJSON, NDJSON], &row));
        assert_eq!(
            rows[0]["problem"]["errors"][0]["pointer"],
            format!("/{name}"),
            "{query} {name}"
        );
    }
    // Without E a turn of B needs no columns of E.
    let turned = answer(
        "rotation.axis=0,0,1&rotation.angle=0",
        [CSV, CSV],
        "bx,by,bz\n1,2,3\n",
    );
    assert_eq!(turned, "bx,by,bz,problem\n1.0,2.0,3.0,\n");
}

#[test]
fn queries_name_all_their_slips() {
    let faults = |query: &str| -> Vec<String> {
        let node = from_query(query).expect("a query");
        let faults = Series::read(node, &deployment()).expect_err(query);
        faults
            .iter()
            .map(|fault| {
                format!(
                    "{} {}",
                    fault.code,
                    fault
                        .path
                        .as_ref()
                        .map(|path| path.parameter())
                        .unwrap_or_default()
                )
            })
            .collect()
    };
    assert_eq!(
        faults("e=1,2,3&include=energy&on_error=go&end=no&units.e=mv&velocity=4e8,0,0&colour=red"),
        [
            "unknown_choice on_error",
            "unknown_choice end",
            "unknown_field e",
            "unknown_field include",
            "unknown_field colour",
            "unknown_unit units.e",
            "faster_than_light velocity",
        ]
    );
}

#[test]
fn foreign_columns_pass_untouched() {
    let row = "{ \"a\\u00e9\": [1, {\"x\": 1e2}], \"b\":[0,0,0] ,\"n\":1.50,\t\"e\":[0,0,0],\"s\":\"\\\"\\n\" }";
    let rows = answer("velocity=1,0,0&end=off", [NDJSON, NDJSON], row);
    assert_eq!(rows, row.replace("[0,0,0]", "[0.0,0.0,0.0]") + "\n");
    // Quoted fields with commas, quotes and line ends; CRLF stays CRLF; a mark of UTF-8 goes.
    let table = "\u{feff}\"no, te\",ex,ey,ez,\"bx\",by,bz\r\n\"a \"\"b\"\"\r\nc\",0,\"0\",0,0,0, 0 \r\n5\" mast,0,0,0,0,0,0";
    let expected = "\"no, te\",ex,ey,ez,\"bx\",by,bz,problem\r\n\"a \"\"b\"\"\r\nc\",0.0,0.0,0.0,0.0,0.0,0.0,\r\n5\" mast,0.0,0.0,0.0,0.0,0.0,0.0,\r\n";
    assert_eq!(answer("velocity=1,0,0", [CSV, CSV], table), expected);
    let kept = lines(&answer(
        "velocity=1,0,0&keep=[%22no,%20te%22]&end=off",
        [CSV, NDJSON],
        table,
    ));
    assert_eq!(kept[0]["no, te"], "a \"b\"\r\nc");
    assert_eq!(kept[1]["no, te"], "5\" mast");
}

#[test]
fn a_row_too_long_ends_the_series_after_what_came_before() {
    let good = "{\"e\":[0,0,0],\"b\":[0,0,0]}\n";
    let text = format!("{good}{{\"note\":\"{}", "x".repeat(5000));
    let (answered, refusal) = in_pieces("velocity=1,0,0", [NDJSON, NDJSON], text.as_bytes(), 1000);
    assert_eq!(answered, "{\"e\":[0.0,0.0,0.0],\"b\":[0.0,0.0,0.0]}\n");
    assert_eq!(
        refusal.expect("a refusal").faults[0].code.name(),
        "row_too_long"
    );
}

#[test]
fn many_threads_give_the_answer_of_one() {
    let mut text = "ex,ey,ez,bx,by,bz,vx,vy,vz\n".to_owned();
    let mut random = Random(3);
    for i in 0..20_000 {
        let [e, b, v] = [0, 3, 4].map(|digits| random.vector(digits));
        let v = if i % 1000 == 0 {
            [4e8, 0.0, 0.0]
        } else {
            v.map(|x| x % 1e8)
        };
        let numbers = [e, b, v]
            .as_flattened()
            .iter()
            .map(f64::to_string)
            .collect::<Vec<_>>();
        writeln!(text, "{}", numbers.join(",")).unwrap();
    }
    let answers = [1, 3].map(|threads| {
        let mut answer = Vec::new();
        let counts = run(
            series(""),
            [CSV, NDJSON],
            LIMITS,
            threads,
            text.as_bytes(),
            &mut answer,
        )
        .expect("an answer");
        assert_eq!(
            counts,
            Counts {
                read: 20_000,
                answered: 19_980,
                refused: 20
            }
        );
        answer
    });
    assert!(answers[0] == answers[1]);
    let last = lines(std::str::from_utf8(&answers[0]).unwrap());
    assert_eq!(last[19_000]["row"], 19_001);
}
