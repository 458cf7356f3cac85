//! Picking from the committed reference run.

use assert_cmd::Command;
use serde_json::Value;

fn pick(arguments: &[&str]) -> assert_cmd::assert::Assert {
    Command::cargo_bin("widefront")
        .unwrap()
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .args(["pick", "results/reference"])
        .args(arguments)
        .assert()
}

fn designs(arguments: &[&str]) -> Vec<Value> {
    let output = pick(arguments).success();
    let json: Value = serde_json::from_slice(&output.get_output().stdout).unwrap();
    json["designs"].as_array().unwrap().clone()
}

#[test]
fn law_what_is_picked_meets_the_conditions_best_first() {
    let all = designs(&["--json"]);
    let found = designs(&[
        "--at-least",
        "output_power=15dBm",
        "--at-most",
        "area=0.3 mm^2",
        "--json",
    ]);
    assert!(!found.is_empty() && found.len() < all.len());
    let number = |d: &Value, key: &str| d[key].as_f64().unwrap();
    let meets = |d: &&Value| {
        number(d, "output_power_w") >= 10f64.powf(-1.5) && number(d, "area_m2") <= 0.3e-6
    };
    assert!(found.iter().all(|d| meets(&d)));
    assert_eq!(found.len(), all.iter().filter(meets).count());
    for pair in found.windows(2) {
        assert!(number(&pair[0], "efficiency") >= number(&pair[1], "efficiency"));
    }
    let by_area = designs(&["--best", "area", "--at-most", "losses.gate=5mW", "--json"]);
    for pair in by_area.windows(2) {
        assert!(number(&pair[0], "area_m2") <= number(&pair[1], "area_m2"));
    }
    assert!(
        by_area
            .iter()
            .all(|d| number(&d["losses_w"], "gate") <= 5e-3)
    );
    // A design's own values answer to their short names.
    let low = designs(&["--at-most", "supply=1.1V", "--json"]);
    assert!(low.iter().all(|d| number(&d["design"], "supply_v") <= 1.1));
}

#[test]
fn law_when_nothing_fits_the_nearest_are_named() {
    let output = pick(&[
        "--at-least",
        "output_power=20dBm",
        "--at-most",
        "area=0.2mm2",
    ])
    .code(1);
    let text = String::from_utf8(output.get_output().stderr.clone()).unwrap();
    assert!(text.contains("output_power at least") && text.contains("misses it by"));
    assert!(text.contains("met by some design") && text.contains("nearest designs"));
}

#[test]
fn law_bad_requests_are_told() {
    for (arguments, said) in [
        (["--best", "eficiency"], "did you mean \"efficiency\"?"),
        (["--at-least", "output_power=15"], "no unit"),
        (["--at-least", "output_power"], "KEY=VALUE"),
        (["--at-most", "area=3V"], "area"),
    ] {
        let output = pick(&arguments).code(2);
        let text = String::from_utf8(output.get_output().stderr.clone()).unwrap();
        assert!(text.contains(said), "{text}");
    }
}
