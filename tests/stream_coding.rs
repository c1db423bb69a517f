//! Series that are compressed, either way (RFC 9110 §8.4.1, §12.5.3).

use async_compression::tokio::bufread::{GzipDecoder, ZstdDecoder};
use axum::body::{Body, Bytes};
use http_body_util::BodyExt;
use lodeframe::config::Config;
use tokio::io::{AsyncRead, AsyncReadExt};
use tower::ServiceExt;

use crate::stream::{NDJSON, PATH, ROW, ask, pieces, request, row, with};
use crate::support::service;

/// What stands in a packed answer, as far as it can be unpacked; and whether it is whole.
async fn unpacked(coding: &str, packed: &[u8]) -> (String, bool) {
    async fn read(mut from: impl AsyncRead + Unpin) -> (String, bool) {
        let mut text = Vec::new();
        let whole = from.read_to_end(&mut text).await.is_ok();
        (String::from_utf8(text).expect("UTF-8"), whole)
    }
    match coding {
        "gzip" => read(GzipDecoder::new(packed)).await,
        "zstd" => read(ZstdDecoder::new(packed)).await,
        _ => (String::from_utf8(packed.to_vec()).expect("UTF-8"), true),
    }
}

/// Both codings, as a request asks for them.
const CODINGS: [&str; 2] = ["gzip", "zstd"];

#[tokio::test]
async fn a_compressed_body_is_unpacked_while_it_arrives() {
    use async_compression::tokio::bufread::{GzipEncoder, ZstdEncoder};
    use tokio::io::AsyncReadExt;
    let text = ROW.repeat(5000);
    let plain = ask(PATH, &[("content-type", NDJSON)], text.clone()).await;
    let (mut gzip, mut zstd) = (Vec::new(), Vec::new());
    GzipEncoder::new(text.as_bytes())
        .read_to_end(&mut gzip)
        .await
        .unwrap();
    ZstdEncoder::new(text.as_bytes())
        .read_to_end(&mut zstd)
        .await
        .unwrap();
    for (coding, packed) in [("gzip", &gzip), ("x-gzip", &gzip), ("zstd", &zstd)] {
        let headers = [("content-type", NDJSON), ("content-encoding", coding)];
        let answer = ask(PATH, &headers, packed.clone()).await;
        assert!(answer.body == plain.body, "{coding}");
        // What is no such coding, or only half of one, is no whole question.
        ask(PATH, &headers, ROW).await.problem("syntax");
        let half = packed[..packed.len() / 2].to_vec();
        let response = service()
            .oneshot(request(PATH, &headers, half))
            .await
            .unwrap();
        let problem = response.status().is_client_error();
        assert!(
            problem || response.into_body().collect().await.is_err(),
            "{coding}"
        );
    }
    // Members and frames may follow each other.
    let twice = [&gzip[..], &gzip].concat();
    let answer = ask(
        PATH,
        &[("content-type", NDJSON), ("content-encoding", "gzip")],
        twice,
    )
    .await;
    assert!(
        answer
            .text()
            .ends_with("{\"end\":{\"read\":10000,\"answered\":10000,\"refused\":0}}\n")
    );
}

#[tokio::test]
async fn the_answer_is_coded_as_the_client_likes_best() {
    let plain = ask(PATH, &[("content-type", NDJSON)], ROW.repeat(3000)).await;
    assert_eq!(plain.header("content-encoding"), "");
    assert_eq!(plain.header("vary"), "accept, accept-encoding");
    for (accepts, coding) in [
        ("", ""),
        ("identity", ""),
        ("br, deflate", ""),
        ("gzip", "gzip"),
        ("x-gzip", "gzip"),
        ("GZIP;q=0.5", "gzip"),
        ("gzip, deflate", "gzip"),
        ("gzip, deflate, br, zstd", "zstd"),
        ("gzip;q=1.0, zstd;q=0.9", "gzip"),
        ("gzip;q=0, zstd;q=0", ""),
        ("identity;q=0.5, gzip;q=0.4", ""),
        ("identity;q=0, gzip;q=0.001", "gzip"),
        ("*", "zstd"),
        ("*;q=0, gzip", "gzip"),
        ("zstd;q=0, *", "gzip"),
        ("zstd;q=much, gzip", "gzip"),
    ] {
        let headers = [("content-type", NDJSON), ("accept-encoding", accepts)];
        let answer = ask(PATH, &headers, ROW.repeat(3000)).await;
        assert_eq!(answer.header("content-encoding"), coding, "{accepts}");
        assert_eq!(answer.header("vary"), "accept, accept-encoding");
        let (text, whole) = unpacked(coding, &answer.body).await;
        assert!(whole && text == plain.text(), "{accepts}");
        assert!(coding.is_empty() || answer.body.len() < text.len() / 20);
    }
    for accepts in ["identity;q=0", "*;q=0", "br, identity;q=0"] {
        let headers = [("content-type", NDJSON), ("accept-encoding", accepts)];
        ask(PATH, &headers, ROW).await.problem("not_acceptable");
    }
    // A problem goes as it is.
    let headers = [("content-type", NDJSON), ("accept-encoding", "gzip")];
    let refused = ask("/v1/series?velocity=slow", &headers, ROW).await;
    assert_eq!(refused.header("content-encoding"), "");
    refused.problem("wrong_length");
}

#[tokio::test]
async fn an_answer_without_rows_is_whole_too() {
    for coding in CODINGS {
        let headers = [("content-type", NDJSON), ("accept-encoding", coding)];
        let answer = ask(&format!("{PATH}&end=off"), &headers, "").await;
        assert_eq!(unpacked(coding, &answer.body).await, (String::new(), true));
    }
}

#[tokio::test]
async fn a_row_is_answered_before_the_next_one_comes() {
    for coding in CODINGS {
        let (sender, body) = pieces();
        let headers = [("content-type", NDJSON), ("accept-encoding", coding)];
        row(&sender, ROW);
        let asked = service().oneshot(request(PATH, &headers, body));
        let mut answer = asked.await.expect("an answer").into_body();
        let mut packed = Vec::new();
        for rows in 1..=5 {
            let frame = answer.frame().await.expect("a frame").expect("no failure");
            packed.extend_from_slice(frame.data_ref().expect("data"));
            let (text, whole) = unpacked(coding, &packed).await;
            assert_eq!((text.lines().count(), whole), (rows, false), "{coding}");
            assert!(text.ends_with("}\n"));
            row(&sender, ROW);
        }
        drop(sender);
        packed.extend(answer.collect().await.expect("a proper end").to_bytes());
        let (text, whole) = unpacked(coding, &packed).await;
        assert!(whole && text.ends_with("{\"end\":{\"read\":6,\"answered\":6,\"refused\":0}}\n"));
    }
}

#[tokio::test]
async fn an_answer_that_breaks_off_is_not_whole() {
    for coding in CODINGS {
        let (sender, body) = pieces();
        let headers = [("content-type", NDJSON), ("accept-encoding", coding)];
        row(&sender, &ROW.repeat(2000));
        let asked = service().oneshot(request(PATH, &headers, body));
        let mut answer = asked.await.expect("an answer").into_body();
        let gone = std::io::Error::other("gone");
        sender.send(Err(gone)).expect("someone reads");
        let mut packed = Vec::new();
        let failure = loop {
            match answer.frame().await.expect("a failure comes first") {
                Ok(frame) => packed.extend_from_slice(frame.data_ref().expect("data")),
                Err(failure) => break failure,
            }
        };
        assert!(failure.to_string().contains("broke off"));
        let (text, whole) = unpacked(coding, &packed).await;
        let last = text.lines().last().expect("a last word");
        assert!(
            !whole && last.contains("\"row\":2001,\"problem\""),
            "{coding}: {last}"
        );
    }
}

#[tokio::test]
async fn rows_that_nobody_reads_are_bounded_also_when_they_are_packed() {
    // Rows that do not repeat themselves, so that packing them leaves something (splitmix64,
    // Steele, Lea and Flood 2014, from memory).
    let mut state = 0u64;
    let mut number = || {
        state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut x = (state ^ (state >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        x = (x ^ (x >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((x ^ (x >> 31)) >> 11) as f64 / 2f64.powi(53)
    };
    let mut piece = || {
        let mut text = String::new();
        for _ in 0..1000 {
            let [a, b, c]: [f64; 3] = std::array::from_fn(|_| number());
            text += &format!("{{\"e\":[{a},{b},{c}],\"b\":[0,0,1],\"velocity\":[1,0,0]}}\n");
        }
        Bytes::from(text)
    };
    for coding in CODINGS {
        let app = with(Config {
            buffer: 64 * 1024,
            ..Config::default()
        });
        let (sender, body) = bounded_pieces();
        let headers = [("content-type", NDJSON), ("accept-encoding", coding)];
        let asked = tokio::spawn(app.oneshot(request(PATH, &headers, body)));
        let mut sent = 0;
        // The service stops reading while its answer waits.
        while sent < 100 {
            let wait = std::time::Duration::from_secs(2);
            match tokio::time::timeout(wait, sender.send(piece())).await {
                Ok(taken) => taken.expect("someone reads"),
                Err(_) => break,
            }
            sent += 1;
        }
        assert!(sent < 40, "{coding}: {sent} pieces were taken");
        drop(sender);
        let answer = asked.await.unwrap().expect("an answer").into_body();
        let packed = answer.collect().await.expect("a proper end").to_bytes();
        let (text, whole) = unpacked(coding, &packed).await;
        assert!(whole);
        assert_eq!(text.lines().count(), sent * 1000 + 1, "{coding}");
    }
}

/// A body of which one piece at most waits to be read.
fn bounded_pieces() -> (tokio::sync::mpsc::Sender<Bytes>, Body) {
    let (sender, receiver) = tokio::sync::mpsc::channel(1);
    let stream = futures_util::stream::unfold(receiver, |mut receiver| async {
        let piece: Bytes = receiver.recv().await?;
        Some((Ok::<_, std::io::Error>(piece), receiver))
    });
    (sender, Body::from_stream(stream))
}
