//! Methods on claims as people write them: what a method finds is put to the kernel.

use crate::kernel::audit::{Docket, Verdict};
use crate::language::lower::lower;
use crate::search::{Effort, Method, Referee, Search, Stuck};
use crate::source::{MemoryLibrary, Sources};
use crate::statement::{Sequent, obligations, plain};

/// The sequent of the only claim of a dossier with these lines, and the kernel's side of it.
pub fn opened(claim: &str) -> (Sequent, Docket, usize) {
    let text = format!("dossier \"Test\"\nclaim tested {claim}\n");
    let mut sources = Sources::new();
    let file = sources.add("test.obl", text);
    let lowered = lower(&mut sources, &MemoryLibrary::new(), file);
    assert!(!lowered.has_errors(), "{claim}: {:?}", lowered.diagnostics);
    let theory = lowered.theory;
    let docket = Docket::open(&plain(&theory)).expect("the kernel reads the plain form");
    let listed = docket.obligations().iter();
    let position = listed.clone().position(|o| o.id == "tested.1").expect("the claim has a link");
    let found = obligations(&theory).into_iter().find(|o| o.id == "tested.1");
    (found.expect("the same obligations").sequent, docket, position)
}

/// What the method finds, in the presence of the kernel.
pub fn attempted(method: &dyn Method, claim: &str) -> Result<String, Stuck> {
    let (sequent, docket, position) = opened(claim);
    let examine = |sequent: &str, step: &str| {
        docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
    };
    let mut search = Search::new(Effort::default(), 0).asking(Referee(&examine));
    let proof = method.attempt(&sequent, &mut search)?;
    let certificate = format!("certificate 1 for tested.1 holds {proof};");
    let decision = docket.decide(position, &[&certificate]);
    assert!(decision.verdict == Verdict::Holds, "{claim}\n  by {certificate}\n  {:?}", decision.rejected);
    Ok(proof.to_string())
}

/// Asserts that the method proves the claim with a step of this rule.
pub fn proves(method: &dyn Method, claim: &str, rule: &str) {
    match attempted(method, claim) {
        Ok(proof) => assert!(proof.contains(&format!("{{{rule}")), "{claim}\n  by {proof}"),
        Err(stuck) => panic!("{claim}\n  {}", stuck.remark()),
    }
}

/// Asserts that the method proves none of these.
pub fn leaves(method: &dyn Method, claims: &[&str]) {
    for claim in claims {
        if let Ok(proof) = attempted(method, claim) {
            panic!("{claim}\n  by {proof}");
        }
    }
}
