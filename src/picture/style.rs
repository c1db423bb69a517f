//! The look of all pictures.

/// The style sheet that every picture carries.
///
/// Blue, vermilion and bluish green stay apart under the common kinds of colour blindness
/// (Okabe and Ito, Color Universal Design, 2008), here darkened for paper and lightened for a
/// dark screen to a contrast of at least 4.5 (WCAG 2.2, 1.4.3).
pub const STYLE: &str = "\
text{font:11px system-ui,sans-serif;fill:#1b1f24}
.paper{fill:#fff}
.soft{fill:#555d66}
.head{font-weight:600;font-size:12px}
.number{font-variant-numeric:tabular-nums}
.axis,.frame{stroke:#7b848e;stroke-width:1;fill:none}
.grid{stroke:#d9dde2;stroke-width:.7}
.drop{stroke:#7b848e;stroke-width:.8;stroke-dasharray:1 2.5}
.turned{stroke:#555d66;stroke-width:1;stroke-dasharray:6 3}
.line{stroke-width:2.2;fill:none}
.one{stroke:#0b5c9e}.two{stroke:#ab4300}.three{stroke:#00695a}.all{stroke:#1b1f24}
.dashed{stroke-dasharray:7 3}.dotted{stroke-dasharray:1.5 3}.thick{stroke-width:3}
.full-one{fill:#0b5c9e}.full-two{fill:#ab4300}.full-three{fill:#00695a}.full-all{fill:#1b1f24}
.bold{font-weight:700}
.band{fill-opacity:.16;stroke:none}.edge{stroke-width:.9;fill:none}
.region{fill-opacity:.12;stroke-width:1;stroke-dasharray:3 2}
@media screen and (prefers-color-scheme:dark){
text{fill:#e9ecef}.paper{fill:#15191e}.soft{fill:#aab2bb}
.axis,.frame,.drop{stroke:#8d97a1}.grid{stroke:#343b43}.turned{stroke:#aab2bb}
.one{stroke:#74b7f2}.two{stroke:#f29a5f}.three{stroke:#4fc9b0}.all{stroke:#e9ecef}
.full-one{fill:#74b7f2}.full-two{fill:#f29a5f}.full-three{fill:#4fc9b0}.full-all{fill:#e9ecef}
}";
