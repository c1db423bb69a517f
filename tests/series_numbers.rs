//! Numbers in rows of NDJSON are read as `serde_json` reads them, a general-purpose reader: the same
//! double, or refused.

use super::series::{NDJSON, in_pieces, lines};

/// Texts around every count of digits at which reading eight at a time goes another way.
fn texts() -> Vec<String> {
    let mut all: Vec<String> = [
        "", "-", "+1", ".5", "-.5", "1.", "1.e2", "1e", "1e+", "0x1", "1_0", "٣", "1e400", "-0",
        "-0.0", "NaN",
    ]
    .map(str::to_owned)
    .into();
    for count in 1..=25 {
        let digits = &"8345678901234567890912345"[..count];
        for sign in ["", "-"] {
            for head in ["", "0", "00"] {
                for tail in [
                    "", ".", ".5", ".e1", "e-3", "E5", ":", "/", "\u{7f}", "\u{b9}",
                ] {
                    all.push(format!("{sign}{head}{digits}{tail}"));
                }
            }
            all.push(format!("{sign}0.{digits}"));
            all.push(format!("{sign}{digits}.{digits}e-07"));
        }
    }
    all
}

#[test]
fn numbers_are_read_as_by_a_general_reader() {
    let texts = texts();
    let rows: String = texts
        .iter()
        .map(|text| format!("{{\"e\":[{text},1,1],\"b\":[0,0,0],\"velocity\":[0,0,0]}}\n"))
        .collect();
    let (answer, refusal) = in_pieces("velocity=row", [NDJSON; 2], rows.as_bytes(), 1 << 20);
    assert!(refusal.is_none());
    let answers = lines(&answer);
    assert!(answers.len() >= texts.len(), "every row has an answer");
    let mut read = 0;
    for (text, answer) in texts.iter().zip(&answers) {
        match serde_json::from_str::<f64>(text) {
            Ok(value) => {
                read += 1;
                assert_eq!(answer["e"][0].as_f64(), Some(value), "{text}: {answer}");
            }
            Err(_) => assert!(answer["problem"].is_object(), "{text}: {answer}"),
        }
    }
    assert!(
        (300..texts.len() - 300).contains(&read),
        "{read} of {}",
        texts.len()
    );
}
