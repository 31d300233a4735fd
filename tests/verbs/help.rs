//! Help is a result: on the output, with status 0.

use crate::ringwright;

#[test]
fn every_verb_has_help_with_an_example() {
    for verb in ["orient", "reach", "plan", "verify", "demo"] {
        let run = ringwright(&[verb, "--help"]);
        assert_eq!(run.status(), 0);
        assert!(run.out.contains(&format!("Example:\n  ringwright {verb}")), "{}", run.out);
        assert_eq!(run.err, "");
    }
    let run = ringwright(&["--help"]);
    assert_eq!(run.status(), 0);
    assert!(run.out.contains("Exit status: 0 done, 1 the answer is no, 2 bad input."), "{}", run.out);
    assert!(ringwright(&["--version"]).out.starts_with("ringwright "));
}
