#![no_main]

#[path = "../targets.rs"]
#[allow(dead_code)]
mod targets;

libfuzzer_sys::fuzz_target!(
    init: {
        // Panics of the decoder are caught and become a problem; only others end the run.
        drop(std::panic::take_hook());
        std::panic::set_hook(Box::new(|_| {}));
    },
    |data: &[u8]| targets::arrow(data)
);
