//! The table of constants.

use axum::response::Response;
use serde::Serialize;
use utoipa::ToSchema;

use super::json;
use crate::{http::problem::CommonProblems, physics::constants::CONSTANTS};

/// A constant that answers may depend on.
#[derive(Serialize, ToSchema)]
#[schema(example = json!({
    "name": "speed_of_light", "symbol": "c", "value": 299792458.0, "unit": "m/s",
    "uncertainty": 0.0, "source": "SI Brochure, 9th ed. (2019), exact",
}))]
pub(crate) struct ConstantRow {
    /// Name.
    name: &'static str,
    /// Usual symbol.
    symbol: &'static str,
    /// Value, in `unit`.
    value: f64,
    /// Unit of value and uncertainty (UCUM; 1 for a pure number).
    unit: &'static str,
    /// Standard uncertainty; zero where the value is exact by definition.
    uncertainty: f64,
    /// Where the value is published.
    source: &'static str,
}

/// The constants that answers depend on, with their uncertainties and sources.
#[utoipa::path(
    get, path = "/v1/constants", tag = "tables", operation_id = "list_constants",
    responses(
        (status = 200, description = "Every constant", body = Vec<ConstantRow>, content_type = "application/json"),
        CommonProblems,
    ),
)]
pub(crate) async fn constants() -> Response {
    let rows: Vec<ConstantRow> = CONSTANTS
        .iter()
        .map(|row| ConstantRow {
            name: row.name,
            symbol: row.symbol,
            value: row.value,
            unit: row.unit,
            uncertainty: row.uncertainty,
            source: row.source,
        })
        .collect();
    json(&rows)
}
