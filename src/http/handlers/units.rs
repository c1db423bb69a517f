//! The table of units.

use axum::response::Response;
use serde::Serialize;
use utoipa::ToSchema;

use super::json;
use crate::{http::problem::CommonProblems, units::UNITS};

/// One unit that questions and answers may use.
#[derive(Serialize, ToSchema)]
#[schema(example = json!({
    "code": "mV/m", "quantity": "e", "name": "millivolt per metre", "si_factor": 0.001,
    "si_exact": "1/1000", "si": "V/m",
}))]
pub(crate) struct UnitRow {
    /// UCUM code, case-sensitive.
    code: &'static str,
    /// The member of `units` it can stand in.
    quantity: &'static str,
    /// Its name in words.
    name: &'static str,
    /// One unit in the SI unit, as the nearest double.
    si_factor: f64,
    /// The same exactly, as a ratio of whole numbers and pi.
    si_exact: String,
    /// The SI unit of the quantity.
    si: &'static str,
}

/// The units that questions and answers may use.
#[utoipa::path(
    get, path = "/v1/units", tag = "tables", operation_id = "list_units",
    responses(
        (status = 200, description = "Every unit, the SI unit of each quantity first", body = Vec<UnitRow>, content_type = "application/json"),
        CommonProblems,
    ),
)]
pub(crate) async fn units() -> Response {
    let rows: Vec<UnitRow> = UNITS
        .iter()
        .map(|unit| UnitRow {
            code: unit.code,
            quantity: unit.quantity.name(),
            name: unit.name,
            si_factor: unit.si.to_f64(),
            si_exact: unit.si.to_string(),
            si: crate::units::of_quantity(unit.quantity)
                .next()
                .map_or("", |si| si.code),
        })
        .collect();
    json(&rows)
}
