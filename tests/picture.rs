//! Pictures: well-formed, without scripts, with the numbers of the answer.

use crate::support::{Answer, get};

const SVG: (&str, &str) = ("accept", "image/svg+xml");

async fn picture(url: &str) -> Answer {
    let picture = get(url, &[SVG]).await;
    assert_eq!(picture.status, 200, "{}", picture.text());
    assert_eq!(picture.header("content-type"), "image/svg+xml");
    picture
}

/// What stands between the tags of the text elements.
fn words(picture: &Answer) -> Vec<&str> {
    let texts = picture.text().split("<text").skip(1);
    texts
        .filter_map(|text| text.split_once('>')?.1.split_once('<'))
        .map(|(words, _)| words.trim())
        .collect()
}

#[tokio::test]
async fn a_reading_shows_its_numbers_before_and_after() {
    let url = "/v1/transform?e=12.5,340,-3.75&b=1200,-450,44700&units.e=mV/m&units.b=nT\
               &units.velocity=km/s&velocity=7.6,0,0&inverse=true";
    let picture = picture(url).await;
    let words = words(&picture);
    // The answer of the README: E' = (12.5, 679.72, -0.33) mV/m.
    for shown in [
        "340", "679.72", "-0.33", "44700", "mV/m", "nT", "E′", "B′", "v",
    ] {
        assert!(words.contains(&shown), "{shown} is not in {words:?}");
    }
    assert!(words.iter().any(|words| words.contains("7.6 km/s")));
    let text = picture.text();
    assert!(text.contains("(12.5, 679.72, -0.33) mV/m in the target frame"));
    assert!(!text.contains("<script") && !text.contains("href") && !text.contains("onload"));
    assert!(text.contains("<title id=\"title\">") && text.contains("<desc id=\"about\">"));
}

#[tokio::test]
async fn a_missing_component_is_said_and_not_drawn() {
    let whole = picture("/v1/transform?e=1,2,3&b=1,2,3&rotation.axis=0,0,1&rotation.angle=1").await;
    let part = picture("/v1/transform?e=1,,3&b=1,2,3&rotation.axis=0,0,1&rotation.angle=1").await;
    let arrows = |picture: &Answer| picture.text().matches("<polygon").count();
    assert_eq!((arrows(&whole), arrows(&part)), (4, 2));
    assert!(words(&part).contains(&"missing") && !words(&whole).contains(&"missing"));
}

#[tokio::test]
async fn extreme_readings_still_make_pictures() {
    for query in [
        "e=0,0,0&b=0,0,0&velocity=0,0,0",
        "e=1e300,0,0&b=0,0,0&velocity=0,0,0",
        "e=5e-324,0,0&b=0,0,1&velocity=0,0,0",
        "e=1,2,3&b=1,2,3&boost.direction=1,0,0&boost.gamma=1e12",
        "b=1,2,3&rotation.axis=0,0,1&rotation.angle=0",
    ] {
        let picture = picture(&format!("/v1/transform?{query}")).await;
        assert!(
            !picture.text().contains("NaN") && !picture.text().contains("inf"),
            "{query}"
        );
    }
    for range in [
        "over=beta&start=0&stop=0.999999999999&e=1,2,3&b=1,2,3",
        "over=beta&start=0&stop=0.5&e=0,0,0&b=0,0,0",
        "over=beta&start=0&stop=0.5&e=0,0,0&b=0,0,0&scale=log",
        "over=rapidity&start=-600&stop=600&e=1,2,3&b=1,2,3&scale=log",
        "over=rapidity&start=0&stop=1e-300&e=1,2,3&b=1,2,3",
        "over=rapidity&start=0&stop=1&e=1,2,3",
        "over=rapidity&start=0&stop=1&e=1,,3&b=1,2,3&uncertainty.e=1,,1",
        "over=rapidity&start=0&stop=1&e=1,2,3&b=1,2,3&uncertainty.e=1e300,0,1&scale=log",
        "over=rapidity&start=-600&stop=600&e=1,2,3&b=1,2,3&uncertainty.b=1,1,1&scale=log",
        "over=beta&start=0&stop=0.5&e=0,0,0&b=0,0,0&uncertainty.e=1,0,0&scale=log",
    ] {
        let url = format!("/v1/sweep?{range}&boost.direction=1,0,0");
        let picture = picture(&url).await;
        assert!(
            !picture.text().contains("NaN") && !picture.text().contains("inf"),
            "{range}"
        );
    }
}

#[tokio::test]
async fn a_sweep_names_its_curves_and_its_ends() {
    let url = "/v1/sweep?over=beta&start=0&stop=0.6&e=0,0,0&b=0,0,1&boost.direction=1,0,0";
    let picture = picture(url).await;
    let words = words(&picture);
    for shown in ["|E′|", "E′y", "B′z", "0.2", "E′ in V/m", "B′ in T"] {
        assert!(words.contains(&shown), "{shown} is not in {words:?}");
    }
    // Jackson, Classical Electrodynamics, 3rd ed., eq. 11.149: γ = 1.25, E'y = -γβcB, B'z = γB.
    assert!(
        picture.text().contains("y from 0 to -2.24844e8"),
        "{}",
        picture.text()
    );
    assert!(picture.text().contains("z from 1 to 1.25"));
}

#[tokio::test]
async fn browsers_that_want_an_image_get_one() {
    // What a browser sends for an <img>, as of 2026; a script that takes anything gets JSON.
    let image = "image/avif,image/webp,image/apng,image/svg+xml,image/*,*/*;q=0.8";
    let url = "/v1/transform?e=1,2,3&b=1,2,3&velocity=1,2,3";
    let picture = get(url, &[("accept", image)]).await;
    assert_eq!(picture.header("content-type"), "image/svg+xml");
    assert!(
        picture
            .header("content-security-policy")
            .starts_with("default-src 'none'")
    );
    assert_eq!(
        get(url, &[("accept", "*/*")]).await.header("content-type"),
        "application/json"
    );
}
