//! Uncertainties in a series: those of rows, and those that the query states of its way, are the
//! same bits as in single readings.

use std::fmt::Write;

use lodeframe::document::from_query;
use lodeframe::series::Series;
use serde_json::{Value, json};

use crate::series::{CSV, NDJSON, answer, deployment, lines, refused, single};

#[test]
fn uncertainties_of_rows_are_restated_as_in_single_readings() {
    let units = json!({"e": "mV/m", "b": "nT", "velocity": "km/s"});
    let steps = |v: &str| {
        format!(
            "[{{\"rotate\":{{\"axis\":[0,0,1],\"angle\":0.3,\"uncertainty\":[0.01,0,0.02]}}}},{{\"boost\":{{\"velocity\":{v},\"uncertainty\":[0.1,0.1,0.2]}}}}]"
        )
    };
    let query = format!(
        "units.e=mV/m&units.b=nT&units.velocity=km/s&steps={}",
        steps("\"row\"")
    );
    let rows = [
        (
            [1.5, -20.0, 3.0],
            [20000.0, 300.0, -45000.0],
            [0.1, 0.2, 0.3],
            [5.0, 6.0, 7.0],
            [7.6, 0.1, 0.0],
        ),
        (
            [0.0, 2.0, 30.0],
            [10.0, 0.0, 4.0],
            [0.0, 0.2, 0.0],
            [0.0, 0.0, 1.0],
            [0.0, 7.5, 0.0],
        ),
    ];
    let mut ndjson = String::new();
    let mut table = "ex,ey,ez,u_ex,u_ey,u_ez,bx,by,bz,u_bx,u_by,u_bz,vx,vy,vz\n".to_owned();
    let mut expected = Vec::new();
    for (e, b, u_e, u_b, v) in rows {
        let uncertainty = json!({"e": u_e, "b": u_b});
        let row = json!({"uncertainty": uncertainty, "e": e, "b": b, "velocity": v});
        writeln!(ndjson, "{row}").unwrap();
        let numbers = [e, u_e, b, u_b, v].concat();
        let numbers = numbers.iter().map(|x| format!("{x:?}"));
        writeln!(table, "{}", numbers.collect::<Vec<_>>().join(",")).unwrap();
        let own: Value = serde_json::from_str(&steps(&json!(v).to_string())).unwrap();
        let question =
            json!({"e": e, "b": b, "uncertainty": uncertainty, "units": units, "steps": own});
        expected.push(single(&question));
    }
    for (format, text) in [(NDJSON, &ndjson), (CSV, &table)] {
        let answered = lines(&answer(&query, [format, NDJSON], text));
        for (row, expected) in answered.iter().zip(&expected) {
            let known = expected.uncertainty.as_ref().expect("an uncertainty");
            assert_eq!(row["uncertainty"], json!({"e": known.e, "b": known.b}));
            assert_eq!(row["e"], json!(expected.e));
        }
    }
    let same = answer(&query, [CSV, CSV], &table);
    let known = expected[0].uncertainty.as_ref().unwrap();
    let first: Vec<&str> = same.lines().nth(1).unwrap().split(',').collect();
    assert_eq!(first[3].parse::<f64>().unwrap(), known.e[0].unwrap());
    assert_eq!(first[11].parse::<f64>().unwrap(), known.b[2].unwrap());

    // A way of its own, a covariance, and what is missing or wrong.
    let own = json!({"e": [1, 2, 3], "b": [0.1, 0.2, 0.3], "velocity": [1e7, 0, 0], "uncertainty": {"velocity": [1e4, 0, 0]}});
    let covariance: Vec<Vec<f64>> = (0..6)
        .map(|i| (0..6).map(|j| if i == j { 4.0 } else { 1.0 }).collect())
        .collect();
    let correlated = json!({"e": [1, 2, 3], "b": [0.1, 0.2, 0.3], "velocity": [1e7, 0, 0], "uncertainty": {"covariance": covariance}});
    for row in [&own, &correlated] {
        let answered = lines(&answer("", [NDJSON, NDJSON], &row.to_string()));
        let known = single(row).uncertainty.expect("an uncertainty");
        assert_eq!(
            answered[0]["uncertainty"],
            json!({"e": known.e, "b": known.b})
        );
    }
    let text = "bx,by,bz,u_bx,u_by,u_bz\n1,2,3,0.5,0.5,-1\n1,2,3,,0.5,0.5\n1,2,3,,,\n";
    let answered = answer("rotation.axis=0,0,1&rotation.angle=0", [CSV, CSV], text);
    let rows: Vec<&str> = answered.lines().collect();
    assert!(
        rows[1].starts_with(",,,,,,negative_uncertainty (u_bz): "),
        "{}",
        rows[1]
    );
    assert!(
        rows[2].starts_with(",,,,,,\"missing_field (u_bx): "),
        "{}",
        rows[2]
    );
    assert_eq!(rows[3], "1.0,2.0,3.0,,,,");
    let text = "{\"b\":[1,2,3],\"uncertainty\":{\"b\":[1,1,-1],\"velocity\":[1,1,1]}}";
    let rows = lines(&answer(
        "rotation.axis=0,0,1&rotation.angle=0",
        [NDJSON, NDJSON],
        text,
    ));
    let codes: Vec<&str> = rows[0]["problem"]["errors"]
        .as_array()
        .unwrap()
        .iter()
        .map(|error| error["code"].as_str().unwrap())
        .collect();
    assert_eq!(codes, ["negative_uncertainty", "conflicting_fields"]);
}

/// The standard uncertainties of a single reading.
fn standard(question: &Value) -> Value {
    let known = single(question).uncertainty.expect("an uncertainty");
    json!({"e": known.e, "b": known.b})
}

#[test]
fn uncertainties_of_the_way_in_the_query_count_as_in_a_single_reading() {
    let (e, b) = (json!([1.5, -20.0, 3.0]), json!([2.0, 0.25, -4.0]));
    let v = [4.0e6, -1.0e7, 2.5e6];
    let uncertain = |form: &str, errors: Value| json!({"uncertainty": {form: errors}});
    let steps = |v: Value| {
        json!([
            {"boost": {"velocity": v, "uncertainty": [1e4, 2e4, 3e4]}},
            {"rotate": {"axis": [1, 2, 2], "angle": 0.5, "uncertainty": [0.01, 0.02, 0.03]}},
        ])
    };
    let covariance = json!([[4e8, 1e8, 0.0], [1e8, 4e8, 0.0], [0.0, 0.0, 1e8]]);
    let turn = json!({"axis": [0, 0, 1], "angle": 0.25});
    let by_gamma = json!({"direction": [1, 0, 0], "gamma": 2000});
    let covariant = json!({"covariance": covariance});
    // The query, and the way and uncertainty of the same single reading.
    let ways = [
        (
            "velocity=4e6,-1e7,2.5e6&uncertainty.velocity=1e4,2e4,3e4".to_owned(),
            json!({"velocity": v}),
            uncertain("velocity", json!([1e4, 2e4, 3e4])),
        ),
        (
            "velocity=row&inverse=true&uncertainty.velocity=1e4,2e4,3e4".to_owned(),
            json!({"velocity": v, "inverse": true}),
            uncertain("velocity", json!([1e4, 2e4, 3e4])),
        ),
        (
            format!("boost.velocity=row&uncertainty.boost={covariant}"),
            json!({"boost": {"velocity": v}}),
            uncertain("boost", covariant),
        ),
        (
            "boost.direction=1,0,0&boost.gamma=2000&uncertainty.boost.value=3&uncertainty.boost.direction=1e-4".to_owned(),
            json!({"boost": by_gamma}),
            uncertain("boost", json!({"value": 3, "direction": 1e-4})),
        ),
        (
            "rotation.axis=0,0,1&rotation.angle=0.25&uncertainty.rotation=0.01,0.02,0.03".to_owned(),
            json!({"rotation": turn}),
            uncertain("rotation", json!([0.01, 0.02, 0.03])),
        ),
        (format!("steps={}", steps(json!(v))), json!({"steps": steps(json!(v))}), json!({})),
        (format!("steps={}", steps(json!("row"))), json!({"steps": steps(json!(v))}), json!({})),
    ];
    for (query, way, errors) in ways {
        let mut question = json!({"e": e, "b": b});
        for part in [&way, &errors] {
            question
                .as_object_mut()
                .unwrap()
                .extend(part.as_object().unwrap().clone());
        }
        let alone = standard(&question);
        let mut beside = question.clone();
        beside["uncertainty"]["e"] = json!([0.5, 0.25, 0.125]);
        beside["uncertainty"]["b"] = json!([0.1, 0.2, 0.3]);
        let together = standard(&beside);
        assert_ne!(alone, together);
        let moves = query.contains("row");
        let row = |more: Value| {
            let mut row = json!({"e": e, "b": b});
            if moves {
                row["velocity"] = json!(v);
            }
            row.as_object_mut()
                .unwrap()
                .extend(more.as_object().unwrap().clone());
            row
        };
        let rows = format!(
            "{}\n{}\n",
            row(json!({"note": 1})),
            row(json!({"uncertainty": {"e": [0.5, 0.25, 0.125], "b": [0.1, 0.2, 0.3]}}))
        );
        // In place, a row that states nothing gets a member of its own.
        let in_place = lines(&answer(&query, [NDJSON, NDJSON], &rows));
        assert_eq!(in_place[0]["uncertainty"], alone, "{query}");
        assert_eq!(in_place[1]["uncertainty"], together, "{query}");
        assert_eq!(in_place[0]["note"], 1);
        // In tables, columns: behind those of the rows, or where they stand.
        let motion = |text: &'static str| if moves { text } else { "" };
        let plain = format!(
            "ex,ey,ez,bx,by,bz{}\n1.5,-20,3,2,0.25,-4{}\n",
            motion(",vx,vy,vz"),
            motion(",4e6,-1e7,2.5e6")
        );
        let stated = format!(
            "u_ex,u_ey,u_ez,u_bx,u_by,u_bz,ex,ey,ez,bx,by,bz{}\n0.5,0.25,0.125,0.1,0.2,0.3,1.5,-20,3,2,0.25,-4{}\n",
            motion(",vx,vy,vz"),
            motion(",4e6,-1e7,2.5e6")
        );
        for (text, expected) in [(&plain, &alone), (&stated, &together)] {
            assert_eq!(
                lines(&answer(&query, [CSV, NDJSON], text))[0]["uncertainty"],
                *expected
            );
            let table = answer(&query, [CSV, CSV], text);
            assert_eq!(of_table(&table), *expected, "{table}");
        }
        let table = answer(&query, [CSV, CSV], &plain);
        let header = table.lines().next().unwrap();
        assert!(
            header.ends_with(",u_ex,u_ey,u_ez,u_bx,u_by,u_bz,problem"),
            "{header}"
        );
        assert_eq!(of_table(&answer(&query, [NDJSON, CSV], &rows)), alone);
    }
}

/// The uncertainties in the first row of a table.
fn of_table(text: &str) -> Value {
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let header = reader.headers().unwrap().clone();
    let row = reader.records().next().unwrap().unwrap();
    let number = |name: &str| -> f64 {
        let place = header.iter().position(|own| own == name).unwrap();
        row[place].parse().unwrap()
    };
    let [e, b] =
        ["e", "b"].map(|field| ["x", "y", "z"].map(|axis| number(&format!("u_{field}{axis}"))));
    json!({"e": e, "b": b})
}

#[test]
fn a_row_with_an_uncertain_way_of_its_own_gets_its_uncertainty() {
    let row = json!({"e": [1, 2, 3], "b": [0.1, 0.2, 0.3],
        "boost": {"velocity": [1e7, 0, 0], "uncertainty": [1e5, 0, 0]}});
    let text = row.to_string();
    let answered = lines(&answer("", [NDJSON, NDJSON], &text));
    assert_eq!(answered[0]["uncertainty"], standard(&row));
    assert_eq!(of_table(&answer("", [NDJSON, CSV], &text)), standard(&row));
}

#[test]
fn a_table_of_b_alone_has_uncertainties_of_b_alone() {
    let query = "rotation.axis=0,0,1&rotation.angle=0&uncertainty.rotation=0.1,0,0";
    let table = answer(query, [CSV, CSV], "bx,by,bz\n0,0,3\n0,0,\n0,0,x\n");
    let rows: Vec<&str> = table.lines().collect();
    // A turn by 0.1 rad about x takes 3 from z towards y.
    assert_eq!(rows[0], "bx,by,bz,u_bx,u_by,u_bz,problem");
    let number = |text: &str| text.parse::<f64>().unwrap();
    let cells: Vec<&str> = rows[1].split(',').collect();
    assert_eq!(number(cells[3]), 0.0);
    assert!((number(cells[4]) - 0.3).abs() < 1e-15);
    assert_eq!(number(cells[5]), 0.0);
    // By 0.1 rad about x an unknown z stands in y.
    assert_eq!(rows[2], "0.0,0.0,,0.0,,,");
    assert!(
        rows[3].starts_with(",,,,,,\"wrong_type (bz)"),
        "{}",
        rows[3]
    );
}

#[test]
fn uncertainties_of_the_query_that_go_with_nothing_are_refused() {
    let faults = |query: &str| -> Vec<(String, String)> {
        let node = from_query(query).expect("a query");
        let faults = Series::read(node, &deployment()).expect_err("faults");
        let each = faults.iter().map(|fault| {
            let path = fault.path.as_ref().expect("a place");
            (fault.code.to_string(), path.parameter())
        });
        each.collect()
    };
    let at = |code: &str, place: &str| (code.to_owned(), place.to_owned());
    assert_eq!(
        faults("velocity=row&uncertainty.e=1,1,1&uncertainty.velocity=1,1,-1"),
        [
            at("unknown_field", "uncertainty.e"),
            at("negative_uncertainty", "uncertainty.velocity.2")
        ]
    );
    for query in [
        "uncertainty.velocity=1,1,1",
        "rotation.quaternion=row&uncertainty.velocity=1,1,1",
        "from=payload&to=ground&uncertainty.velocity=1,1,1",
        "from=spinning&to=boom&uncertainty.velocity=1,1,1",
    ] {
        assert_eq!(
            faults(query),
            [at("conflicting_fields", "uncertainty.velocity")],
            "{query}"
        );
    }
    // Rows still say their own.
    let header = "ex,ey,ez,bx,by,bz,u_ex\n";
    assert_eq!(refused("velocity=0,0,0", header).len(), 1);
}
