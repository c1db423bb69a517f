//! Sweeps: each point is the reading that would be asked alone, and slips are refused by name.

use axum::http::StatusCode;
use serde_json::Value;

use crate::support::get;

const READING: &str = "e=12.5,340,-3.75&b=1200,-450,44700&units.e=mV/m&units.b=nT\
                       &units.velocity=km/s&units.angle=deg";

/// A sweep and, for each of its values, the same question asked alone.
async fn compare(range: &str, way: impl Fn(f64) -> String) {
    let swept = get(&format!("/v1/sweep?{READING}&{range}"), &[]).await;
    assert_eq!(swept.status, StatusCode::OK, "{}", swept.text());
    let swept = swept.json();
    let values = swept["values"].as_array().expect("values");
    assert!(values.len() > 2);
    for (i, value) in values.iter().enumerate() {
        let value = value.as_f64().expect("a number");
        let alone = get(&format!("/v1/transform?{READING}&{}", way(value)), &[]).await;
        assert_eq!(alone.status, StatusCode::OK, "{}", alone.text());
        let alone = alone.json();
        for field in ["e", "b"] {
            let column = |name: &str| swept[field][name][i].clone();
            let vector = Value::from(vec![column("x"), column("y"), column("z")]);
            assert_eq!(vector, alone[field], "{field} at {value}");
            let length: f64 = alone[field]
                .as_array()
                .into_iter()
                .flatten()
                .map(|x| x.as_f64().expect("a number").powi(2))
                .sum();
            let magnitude = column("magnitude").as_f64().expect("a number");
            assert!((magnitude / length.sqrt() - 1.0).abs() < 1e-15);
        }
    }
}

#[tokio::test]
async fn every_point_is_the_question_asked_alone() {
    compare(
        "over=rapidity&start=-3&stop=9&points=7&boost.direction=1,2,-2",
        |value| format!("boost.direction=1,2,-2&boost.rapidity={value}"),
    )
    .await;
    compare(
        "over=beta&start=0.9&stop=-0.999999&points=6&boost.direction=1,2,-2",
        |value| format!("boost.direction=1,2,-2&boost.beta={value}"),
    )
    .await;
    compare(
        "over=angle&start=0&stop=360&points=9&rotation.axis=1,1,0",
        |value| format!("rotation.axis=1,1,0&rotation.angle={value}"),
    )
    .await;
    // A turn before a boost of fixed speed; the whole way backwards.
    let steps = |angle: &str| {
        format!(
            "inverse=true&steps=[{{%22rotate%22:{{%22axis%22:[0,0,1]{angle}}}}},\
             {{%22boost%22:{{%22velocity%22:[7.6,0,0]}}}}]"
        )
    };
    compare(
        &format!("over=angle&start=-90&stop=90&points=5&{}", steps("")),
        |value| steps(&format!(",%22angle%22:{value}")),
    )
    .await;
}

#[tokio::test]
async fn a_direction_of_any_length_gives_the_speed_that_was_asked_for() {
    // Along an axis β as a vector is the same question.
    let question = |boost: &str| format!("/v1/transform?{READING}&{boost}");
    for beta in ["0.3", "-0.999999999", "1e-12", "0"] {
        let long = get(
            &question(&format!("boost.direction=0,40,0&boost.beta={beta}")),
            &[],
        )
        .await;
        let vector = get(&question(&format!("boost.beta=0,{beta},0")), &[]).await;
        assert_eq!(long.status, StatusCode::OK);
        assert_eq!(long.json()["e"], vector.json()["e"], "{beta}");
        assert_eq!(long.json()["b"], vector.json()["b"], "{beta}");
    }
    let light = get(&question("boost.direction=0,40,0&boost.beta=-1"), &[]).await;
    light.problem("faster_than_light");
}

#[tokio::test]
async fn columns_are_the_same_in_csv() {
    let url =
        format!("/v1/sweep?{READING}&over=beta&start=0&stop=0.5&points=4&boost.direction=0,0,1");
    let json = get(&url, &[]).await.json();
    let csv = get(&url, &[("accept", "text/csv")]).await;
    assert!(csv.header("content-type").starts_with("text/csv"));
    let mut lines = csv.text().lines();
    assert_eq!(
        lines.next(),
        Some("beta,ex,ey,ez,e_magnitude,bx,by,bz,b_magnitude")
    );
    for (i, line) in lines.enumerate() {
        let cells: Vec<f64> = line
            .split(',')
            .map(|cell| cell.parse().expect("a number"))
            .collect();
        let mut expected = vec![json["values"][i].clone()];
        for field in ["e", "b"] {
            expected.extend(["x", "y", "z", "magnitude"].map(|name| json[field][name][i].clone()));
        }
        assert_eq!(Value::from(cells), Value::from(expected));
    }
    assert_eq!(csv.text().lines().count(), 5);
}

#[tokio::test]
async fn what_is_missing_stays_missing() {
    let url = "/v1/sweep?e=1,,3&b=0,0,1e-5&over=angle&start=0&stop=1&points=3&rotation.axis=0,1,0";
    let json = get(url, &[]).await.json();
    assert_eq!(json["e"]["y"], serde_json::json!([null, null, null]));
    assert_eq!(
        json["e"]["magnitude"],
        serde_json::json!([null, null, null])
    );
    assert!(json["e"]["x"][2].is_number());
    assert_eq!(json["notices"].as_array().map(Vec::len), Some(1));
    let csv = get(url, &[("accept", "text/csv")]).await;
    assert!(
        csv.text()
            .lines()
            .nth(1)
            .is_some_and(|line| line.starts_with("0.0,1.0,,3.0,,"))
    );
}

#[tokio::test]
async fn slips_are_refused_where_they_stand() {
    let cases = [
        ("start=0&stop=1", "missing_field", ""),
        ("over=speed&start=0&stop=1", "unknown_choice", "over"),
        ("over=beta&stop=0.5", "missing_field", ""),
        ("over=beta&start=0&stop=1", "faster_than_light", "stop"),
        ("over=beta&start=-1&stop=0", "faster_than_light", "start"),
        ("over=beta&start=0.5&stop=0.5", "empty_range", "stop"),
        (
            "over=beta&start=0&stop=0.5&points=1",
            "points_out_of_range",
            "points",
        ),
        (
            "over=beta&start=0&stop=0.5&points=10001",
            "points_out_of_range",
            "points",
        ),
        (
            "over=beta&start=0&stop=0.5&points=2.5",
            "wrong_type",
            "points",
        ),
        (
            "over=beta&start=0&stop=0.5&scale=cubic",
            "unknown_choice",
            "scale",
        ),
        (
            "over=beta&start=0&stop=0.5&include=tensor",
            "unknown_field",
            "include",
        ),
        (
            "over=beta&start=0&stop=0.5&speed=3",
            "unknown_field",
            "speed",
        ),
        (
            "over=beta&start=0&start=0&stop=0.5",
            "repeated_field",
            "start",
        ),
        (
            "over=rapidity&start=0&stop=800",
            "precision_exhausted",
            "stop",
        ),
        ("over=angle&start=0&stop=0.5", "missing_field", ""),
        (
            "over=beta&start=0&stop=0.5&boost.gamma=2",
            "missing_field",
            "",
        ),
        (
            "over=rapidity&start=0&stop=708&answer_units.e=uV/m",
            "overflow",
            "answer_units",
        ),
    ];
    for (range, code, parameter) in cases {
        let url = format!("/v1/sweep?{READING}&boost.direction=1,0,0&{range}");
        let problem = get(&url, &[]).await.json();
        let errors = problem["errors"].as_array().expect(range);
        assert_eq!(errors.len(), 1, "{range}: {problem}");
        assert_eq!(errors[0]["code"], code, "{range}");
        assert_eq!(errors[0]["parameter"], parameter, "{range}");
    }
}

#[tokio::test]
async fn a_cache_may_keep_it() {
    let url = format!("/v1/sweep?{READING}&over=beta&start=0&stop=0.5&boost.direction=1,0,0");
    let first = get(&url, &[]).await;
    let tag = first.header("etag").to_owned();
    assert_eq!(
        get(&url, &[("if-none-match", &tag)]).await.status,
        StatusCode::NOT_MODIFIED
    );
    // The same question in other words is the same answer; another range is not.
    let same = get(&format!("{url}&points=200&scale=linear"), &[]).await;
    assert_eq!(same.header("etag"), tag);
    for other in [
        format!("{url}&points=201"),
        url.replace("stop=0.5", "stop=0.6"),
        url.replace("=beta", "=rapidity"),
    ] {
        assert_ne!(get(&other, &[]).await.header("etag"), tag, "{other}");
    }
    let picture = get(&url, &[("accept", "image/svg+xml")]).await;
    assert_ne!(picture.header("etag"), tag);
    assert_eq!(picture.header("vary"), "accept");
}
