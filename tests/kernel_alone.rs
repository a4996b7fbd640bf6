//! The kernel compiles by itself: it is included here by path, so the moment it
//! mentions another room ("cannot find `search` in `crate`") this test no longer
//! builds. What it may use of other crates is checked in `suite/rooms.rs`.

#[path = "../src/kernel/mod.rs"]
#[allow(dead_code, unused_imports)]
mod kernel;

#[test]
fn the_kernel_reads_a_plain_text_without_the_other_rooms() {
    let text = "plain 1 of \"alone\"; parameter x : real in [0, 1]; goal a over x states x <= 1;";
    let theory = kernel::theory::read(text).expect("a sound text");
    assert_eq!(theory.goals.len(), 1);
    let refused = kernel::theory::read("plain 1 of \"alone\"; goal a states y <= 1;").unwrap_err();
    assert_eq!(refused.reason, kernel::verdict::Reason::Name);
}
