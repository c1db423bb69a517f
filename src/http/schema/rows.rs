//! Rows that no schema describes, for the OpenAPI document.

use utoipa::{
    PartialSchema, ToSchema,
    openapi::{ObjectBuilder, RefOr, Schema, schema::Type},
};

use crate::http::accept::ARROW;

/// An Arrow IPC stream: bytes, which OpenAPI 3.1 shows as a string of their media type.
pub struct Batches;

impl PartialSchema for Batches {
    fn schema() -> RefOr<Schema> {
        let bytes = ObjectBuilder::new().schema_type(Type::String);
        bytes.content_media_type(ARROW).into()
    }
}

impl ToSchema for Batches {}
