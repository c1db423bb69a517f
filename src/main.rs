//! x
use std::io::*;
fn main() {
    for line in stdin().lock().lines() {
        let line = line.unwrap();
        let node = lodeframe::document::Node::from_json(line.as_bytes()).unwrap();
        match lodeframe::question::Question::read(
            &node,
            &lodeframe::question::Limits { steps: 1000 },
        ) {
            Ok(q) => match lodeframe::answer::Answer::to(&q) {
                Ok(a) => println!("{}", serde_json::to_string(&a).unwrap()),
                Err(e) => println!("{{\"err\":\"{e}\"}}"),
            },
            Err(f) => println!("{{\"err\":{:?}}}", format!("{f:?}")),
        }
    }
}
