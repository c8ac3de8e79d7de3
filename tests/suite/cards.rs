//! Every rule card held to its own examples, to laws that cost nothing, and to silence on the others'.

use lowside::trials;

#[test]
fn every_card_passes_its_trials() {
    let trials = trials(None);
    assert!(trials.len() > 80, "only {} trials ran", trials.len());
    let failed: Vec<String> = trials
        .iter()
        .filter(|trial| !trial.failures.is_empty())
        .map(|trial| format!("{}: {}\n    {}", trial.card, trial.check, trial.failures.join("\n    ")))
        .collect();
    assert!(failed.is_empty(), "{} of {} trials failed:\n{}", failed.len(), trials.len(), failed.join("\n"));
}
