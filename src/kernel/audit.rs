//! From a plain text and certificates to verdicts: what holds, what fails, what
//! is established, and what everything rests on.

use std::collections::{BTreeMap, BTreeSet};

use super::obligation::{Kind, Obligation, obligations};
use super::read::{self, Reader};
use super::rule::{Kernel, check as prove};
use super::step::Step;
use super::term::Name;
use super::theory::{self, Fact, GoalStatement, Proof, Standing, Theory};
use super::verdict::{Checked, Reason, Reject, refuse};
use super::witness::Witness;

/// What certificates establish about one obligation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Verdict {
    /// True at every point.
    Holds,
    /// False or undefined at this point.
    Fails(String),
    /// There is no point.
    Vacuous,
    /// No certificate.
    Undecided,
}

/// The verdict on one obligation, and a point where what it supposes holds.
#[derive(Clone, Debug)]
pub struct Decision {
    /// The verdict.
    pub verdict: Verdict,
    /// A point satisfying all it supposes, if one was certified.
    pub inhabitant: Option<String>,
    /// Certificates that were refused.
    pub rejected: Vec<Reject>,
}

/// A dossier taken in and its obligations derived.
pub struct Docket {
    theory: Theory,
    obligations: Vec<Obligation>,
    refused: BTreeMap<Name, Reject>,
}

/// What an item rests on, transitively.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Basis {
    /// Assumptions, properties among them.
    pub assumptions: BTreeSet<Name>,
    /// Facts taken from published sources.
    pub cited: BTreeSet<Name>,
    /// Facts argued outside the dossier.
    pub argued: BTreeSet<Name>,
    /// Proved facts passed through.
    pub proved: BTreeSet<Name>,
}

/// The standing of a fact or goal after all certificates are checked.
#[derive(Clone, Debug)]
pub struct Standings {
    /// Its name.
    pub name: Name,
    /// Whether it and everything it rests on is shown.
    pub established: bool,
    /// What is not shown: obligations and items, its own first.
    pub missing: Vec<String>,
    /// What it rests on.
    pub basis: Basis,
}

impl Docket {
    /// Reads a plain text.
    pub fn open(plain: &str) -> Checked<Docket> {
        let theory = theory::read(plain)?;
        let found = obligations(&theory);
        Ok(Docket { theory, obligations: found.list, refused: found.refused.into_iter().collect() })
    }

    /// The name of the dossier.
    pub fn name(&self) -> &str {
        &self.theory.name
    }

    /// The obligations, in order.
    pub fn obligations(&self) -> &[Obligation] {
        &self.obligations
    }

    /// Goals and facts that are refused as they stand (a missing property, a wrong instance).
    pub fn refused(&self) -> &BTreeMap<Name, Reject> {
        &self.refused
    }

    /// Checks certificates for the obligation at a position. Where several are
    /// accepted, vacuous goes before fails, fails before holds.
    pub fn decide(&self, position: usize, certificates: &[&str]) -> Decision {
        let o = &self.obligations[position];
        let mut decision = Decision { verdict: Verdict::Undecided, inhabitant: None, rejected: vec![] };
        let rank = |v: &Verdict| match v {
            Verdict::Vacuous => 3,
            Verdict::Fails(_) => 2,
            Verdict::Holds => 1,
            Verdict::Undecided => 0,
        };
        for text in certificates {
            match self.check(o, text) {
                Ok(Accepted::Verdict(v)) if rank(&v) > rank(&decision.verdict) => decision.verdict = v,
                Ok(Accepted::Verdict(_)) => {}
                Ok(Accepted::Inhabitant(point)) => decision.inhabitant = Some(point),
                Err(reject) => decision.rejected.push(reject),
            }
        }
        decision
    }

    fn check(&self, o: &Obligation, text: &str) -> Checked<Accepted> {
        let mut r = Reader::new(text)?;
        r.word("certificate")?;
        if r.number()? != num_rational::BigRational::from_integer(1.into()) {
            return refuse(Reason::Syntax, "only version 1 of certificates is known");
        }
        r.word("for")?;
        let name = r.name()?;
        if *name != *o.id {
            return refuse(Reason::Name, format!("the certificate is for `{name}`, not `{}`", o.id));
        }
        let kernel = Kernel::new(o.quantities.clone());
        let word = r.name()?;
        let accepted = match &*word {
            "holds" => {
                let step = last_step(&mut r)?;
                if o.kind == Kind::Definedness {
                    o.check_defined(&step, &kernel)?;
                } else {
                    prove(&o.sequent, &step, &kernel)?;
                }
                Accepted::Verdict(Verdict::Holds)
            }
            "vacuous" => {
                let step = last_step(&mut r)?;
                let absurd =
                    super::sequent::Sequent { goal: super::sequent::Goal::Absurd, ..o.sequent.clone() };
                prove(&absurd, &step, &kernel)?;
                Accepted::Verdict(Verdict::Vacuous)
            }
            "fails" | "inhabited" => {
                let witness = Witness::read(&mut r)?;
                finish(&mut r)?;
                if &*word == "fails" {
                    witness.check_failure(&self.theory, o)?;
                    Accepted::Verdict(Verdict::Fails(witness.describe()))
                } else {
                    witness.check_inhabitant(&self.theory, o)?;
                    Accepted::Inhabitant(witness.describe())
                }
            }
            _ => return refuse(Reason::Syntax, format!("`{word}` is not a verdict")),
        };
        Ok(accepted)
    }

    /// Whether a step proves a sequent that is well posed, with the quantities of the
    /// obligation at a position: a trial on behalf of a search. No verdict rests on it.
    pub fn examine(&self, position: usize, sequent: &str, step: &str) -> Checked {
        let kernel = Kernel::new(self.obligations[position].quantities.clone());
        prove(&read::sequent(sequent)?, &read::step(step)?, &kernel)
    }

    /// What is established, given the verdict on every obligation in order: facts
    /// first, then goals, each in the order of the text.
    pub fn conclude(&self, verdicts: &[Verdict]) -> (Vec<Standings>, Vec<Standings>) {
        // What is given no verdict is undecided. Two obligations may carry one name, as
        // the definedness of `g` and the link of a goal `g.d1` do, so names do not count.
        let mut unshown: BTreeMap<Option<&Name>, Vec<String>> = BTreeMap::new();
        for (o, verdict) in
            self.obligations.iter().zip(verdicts.iter().chain(std::iter::repeat(&Verdict::Undecided)))
        {
            let word = match verdict {
                Verdict::Holds => continue,
                Verdict::Fails(_) => "fails",
                Verdict::Vacuous => "vacuous",
                Verdict::Undecided => "undecided",
            };
            unshown.entry(o.owner.as_ref()).or_default().push(format!("{} ({word})", o.id));
        }
        let mut facts: BTreeMap<Name, Standings> = BTreeMap::new();
        let mut goals: BTreeMap<Name, Standings> = BTreeMap::new();
        // Goals use facts stated before them, proved facts name goals stated
        // before them; their positions in the text are not kept, so each is
        // settled when first asked for. The recursion is over earlier statements.
        let mut order: Vec<Work> = self.theory.facts.iter().map(Work::Fact).collect();
        order.extend(self.theory.goals.iter().map(Work::Goal));
        order.reverse();
        while let Some(work) = order.pop() {
            let (name, needs) = match work {
                Work::Fact(f) if facts.contains_key(&f.name) => continue,
                Work::Goal(g) if goals.contains_key(&g.name) => continue,
                Work::Fact(f) => (&f.name, self.goals_of(f)),
                Work::Goal(g) => (&g.name, self.facts_of(g)),
            };
            let open: Vec<Work> = needs
                .iter()
                .filter(|w| match w {
                    Work::Fact(f) => !facts.contains_key(&f.name),
                    Work::Goal(g) => !goals.contains_key(&g.name),
                })
                .copied()
                .collect();
            if !open.is_empty() {
                order.push(work);
                order.extend(open);
                continue;
            }
            let mut found = self.own(name, &unshown);
            for need in needs {
                let other = match need {
                    Work::Fact(f) => &facts[&f.name],
                    Work::Goal(g) => &goals[&g.name],
                };
                found.established &= other.established;
                if !other.established {
                    found.missing.push(other.missing.first().unwrap_or(&other.name.to_string()).clone());
                }
                found.basis.assumptions.extend(other.basis.assumptions.iter().cloned());
                found.basis.cited.extend(other.basis.cited.iter().cloned());
                found.basis.argued.extend(other.basis.argued.iter().cloned());
                found.basis.proved.extend(other.basis.proved.iter().cloned());
                if let Work::Fact(f) = need {
                    let basis = match f.standing {
                        Standing::Assumption => &mut found.basis.assumptions,
                        Standing::Cited(_) => &mut found.basis.cited,
                        Standing::Argued(_) => &mut found.basis.argued,
                        Standing::Proved(_) => &mut found.basis.proved,
                    };
                    basis.insert(f.name.clone());
                }
            }
            match work {
                Work::Fact(f) => facts.insert(f.name.clone(), found),
                Work::Goal(g) => goals.insert(g.name.clone(), found),
            };
        }
        let facts = self.theory.facts.iter().filter_map(|f| facts.remove(&f.name)).collect();
        let goals = self.theory.goals.iter().filter_map(|g| goals.remove(&g.name)).collect();
        (facts, goals)
    }

    /// What of a fact or goal itself is not shown, in the order of the obligations.
    fn own(&self, name: &Name, unshown: &BTreeMap<Option<&Name>, Vec<String>>) -> Standings {
        let mut missing = Vec::new();
        if let Some(reject) = self.refused.get(name) {
            missing.push(format!("{name} ({reject})"));
        }
        for owner in [None, Some(name)] {
            missing.extend(unshown.get(&owner).into_iter().flatten().cloned());
        }
        Standings { name: name.clone(), established: missing.is_empty(), missing, basis: Basis::default() }
    }

    fn facts_of(&self, goal: &GoalStatement) -> Vec<Work<'_>> {
        goal.uses.iter().filter_map(|u| self.theory.fact(&u.fact)).map(Work::Fact).collect()
    }

    fn goals_of(&self, fact: &Fact) -> Vec<Work<'_>> {
        let names: Vec<&Name> = match &fact.standing {
            Standing::Proved(Proof::Chain(names) | Proof::All(names)) => names.iter().collect(),
            Standing::Proved(Proof::Induction { base, step, .. }) => vec![base, step],
            _ => vec![],
        };
        names.into_iter().filter_map(|n| self.theory.goal(n)).map(Work::Goal).collect()
    }
}

#[derive(Clone, Copy)]
enum Work<'a> {
    Fact(&'a Fact),
    Goal(&'a GoalStatement),
}

enum Accepted {
    Verdict(Verdict),
    Inhabitant(String),
}

fn last_step(r: &mut Reader) -> Checked<Step> {
    let step = r.step()?;
    finish(r)?;
    Ok(step)
}

fn finish(r: &mut Reader) -> Checked {
    r.sign(";")?;
    if r.at_end() { Ok(()) } else { r.unexpected("the end") }
}

#[cfg(test)]
mod tests {
    use super::*;

    const PLAIN: &str = r#"
plain 1 of "tail";
parameter mu : real in (0, inf);
parameter s : integer in [4, inf);
quantity mean() : real in [0, inf);
quantity weight(real in (0, inf)) : real in [0, 1];
fact local_mean : assumption over mu states mean() <= mu;
fact is_tail : assumption property upper_tail(weight, mean);
fact markov : cited "Markov 1884"
  schema tail(real in (0, inf)) : real in [0, 1], m() : real in [0, inf)
  for c : real in (0, inf) requires upper_tail(tail, m) states tail(c) <= m()/c;
goal cut.1 over mu, s use is_tail use markov(c = mu*s; tail = weight, m = mean)
  states weight(mu*s) <= mean()/(mu*s);
goal cut.2 over mu, s use local_mean states mean()/(mu*s) <= mu/(mu*s);
goal cut.3 over mu, s states mu/(mu*s) = 1/s;
fact cut : proved chain cut.1, cut.2, cut.3 over mu, s states weight(mu*s) <= 1/s;
goal loose.1 over s, mu use cut states weight(mu*s) < 1/3;
fact loose : proved all loose.1 over mu, s states weight(mu*s) < 1/3;
"#;

    fn ids(d: &Docket) -> Vec<&str> {
        d.obligations().iter().map(|o| o.id.as_str()).collect()
    }

    #[test]
    fn obligations_are_derived_in_order() {
        let d = Docket::open(PLAIN).unwrap();
        assert!(d.refused().is_empty(), "{:?}", d.refused());
        let kinds = [
            "markov.d1",
            "cut.1.s1",
            "cut.1",
            "cut.1.d1",
            "cut.2",
            "cut.2.d1",
            "cut.3",
            "cut.3.d1",
            "loose.1",
            "loose.1.d1",
        ];
        // c > 0 decides markov.d1 alone; s >= 4 decides 1/s alone.
        let expected: Vec<&str> = kinds.into_iter().filter(|id| *id != "markov.d1").collect();
        assert_eq!(ids(&d), expected);
        let side = d.obligations().iter().find(|o| o.id == "cut.1.s1").unwrap();
        assert_eq!(side.claim(), "for all mu : real in (0, inf), s : integer in [4, inf): mu*s > 0");
        let link = d.obligations().iter().find(|o| o.id == "cut.2").unwrap();
        assert_eq!(
            link.claim(),
            "for all mu : real in (0, inf), s : integer in [4, inf) with mean() <= mu: mean()/(mu*s) <= mu/(mu*s)"
        );
    }

    #[test]
    fn a_missing_property_or_a_wrong_composition_is_refused() {
        let without = PLAIN.replace("use is_tail use markov", "use markov");
        let d = Docket::open(&without).unwrap();
        assert!(d.refused()["cut.1"].detail.contains("missing property upper_tail(weight, mean)"));
        let wrong = PLAIN.replace("states weight(mu*s) <= 1/s;\ngoal", "states weight(mu*s) < 1/s;\ngoal");
        assert!(Docket::open(&wrong).unwrap().refused().contains_key("cut"));
        let skipped = PLAIN.replace("proved chain cut.1, cut.2, cut.3", "proved chain cut.1, cut.3");
        assert!(Docket::open(&skipped).unwrap().refused().contains_key("cut"));
        let forward = PLAIN.replace("goal cut.2 over mu, s use local_mean", "goal cut.2 over mu, s use cut");
        assert_eq!(Docket::open(&forward).err().unwrap().reason, Reason::Name);
        let fewer = PLAIN.replace("goal loose.1 over s, mu", "goal loose.1 over s");
        assert!(Docket::open(&fewer).is_err(), "mu is not in scope");
    }

    fn position(d: &Docket, id: &str) -> usize {
        d.obligations().iter().position(|o| o.id == id).unwrap()
    }

    #[test]
    fn witnesses_are_points_and_readings() {
        let d = Docket::open(PLAIN).unwrap();
        // weight = 1/4 is no counterexample, weight(c) = 1/3 violates nothing that is named in loose.1 but cut.
        let fails =
            "certificate 1 for loose.1 fails at mu = 1, s = 3 with weight(c) = 1/3 {sign} {sign} bits 64;";
        let decision = d.decide(position(&d, "loose.1"), &[fails]);
        assert_eq!(decision.verdict, Verdict::Undecided);
        assert!(decision.rejected[0].detail.contains("false"), "s = 3 is outside: {}", decision.rejected[0]);
        // The other obligation's name.
        let decision = d.decide(position(&d, "cut.2"), &[fails]);
        assert_eq!(decision.rejected[0].reason, Reason::Name);
        // Side conditions speak before the fact they are conditions of.
        let good = "certificate 1 for cut.2 inhabited at mu = 1, s = 4 with mean() = 1 bits 64;";
        assert_eq!(
            d.decide(position(&d, "cut.2"), &[good]).inhabitant.as_deref(),
            Some("mu = 1, s = 4, mean = 1")
        );
        let bad = "certificate 1 for cut.2 inhabited at mu = 1, s = 4 with mean() = 2 bits 64;";
        assert!(d.decide(position(&d, "cut.2"), &[bad]).inhabitant.is_none());
        // A failing relation of numbers.
        let plain = "plain 1 of \"t\"; parameter x : real in [0, 1]; goal g over x states exp(x) <= 2.7;";
        let d = Docket::open(plain).unwrap();
        for (text, failing) in [
            ("at x = 1 bits 64", true),
            ("at x = 2 bits 64", false),
            ("at x = 0 bits 64", false),
            ("at nothing bits 64", false),
            ("at x = x bits 64", false),
            ("at x = 1, x = 1 bits 64", false),
            ("at x = 1 undefined [x > 0] bits 64", false),
            ("at x = 1 bits 1000000", false),
        ] {
            let certificate = format!("certificate 1 for g fails {text};");
            let verdict = d.decide(0, &[&certificate]).verdict;
            assert_eq!(matches!(verdict, Verdict::Fails(_)), failing, "{text}");
        }
    }

    #[test]
    fn a_reading_means_the_values_of_the_point() {
        // q(c) = k with k = 1 at the point is not q(c) = c, though the fact's own
        // variable is called k too: q(c) >= c for all c in [0, 2] excludes it.
        let plain = r#"plain 1 of "t"; quantity q(real in [0, 2]) : real in [0, 9];
            fact f : assumption for k : real in [0, 2] states q(k) >= k;
            goal g for k : real in [0, 2] use f(k = k) states q(k) > k;"#;
        let d = Docket::open(plain).unwrap();
        let at = |value: &str| {
            let steps = "{enclose 64} {enclose 64}";
            format!(
                "certificate 1 for g fails at k = 1 with q(c) = {value} {steps} fact f {{identity}} bits 64;"
            )
        };
        assert_eq!(d.decide(position(&d, "g"), &[&at("k")]).verdict, Verdict::Undecided);
        assert!(matches!(d.decide(position(&d, "g"), &[&at("c")]).verdict, Verdict::Fails(_)));
    }

    #[test]
    fn the_ends_of_a_range_must_be_defined() {
        let plain = |low: &str| {
            format!(
                "plain 1 of \"t\"; parameter x : real in [{low}, 1]; quantity q() : real in [sqrt(x), inf);"
            )
        };
        assert_eq!(ids(&Docket::open(&plain("-1")).unwrap()), ["domain.d1"]);
        assert!(Docket::open(&plain("0")).unwrap().obligations().is_empty());
        let schema = "plain 1 of \"t\"; parameter x : real in [-1, 1]; \
            fact f : cited \"s\" over x schema q() : real in [sqrt(x), inf) states q() >= 0;";
        assert_eq!(Docket::open(schema).err().unwrap().reason, Reason::Condition);
    }

    #[test]
    fn undefinedness_is_a_failure_of_its_own() {
        let plain = "plain 1 of \"t\"; parameter x : real in [-1, 1]; goal g over x states x/x >= 1;";
        let d = Docket::open(plain).unwrap();
        assert_eq!(ids(&d), ["g", "g.d1"]);
        let text = "certificate 1 for g.d1 fails at x = 0 undefined [x != 0] bits 64;";
        assert_eq!(d.decide(1, &[text]).verdict, Verdict::Fails("x = 0".into()));
        let text = "certificate 1 for g.d1 fails at x = 1 undefined [x != 0] bits 64;";
        assert_eq!(d.decide(1, &[text]).verdict, Verdict::Undecided);
        let text = "certificate 1 for g.d1 fails at x = 0 undefined [x != 1] bits 64;";
        assert_eq!(d.decide(1, &[text]).verdict, Verdict::Undecided);
    }

    #[test]
    fn a_condition_that_is_only_sufficient_refutes_nothing() {
        // gamma(-1/2) and (-1)^2 are defined, although no rule shows it.
        let plain = "plain 1 of \"t\"; goal g for x : real in [-1, 1], p : real in [1, 3] \
            states gamma(x) + x^p >= 0;";
        let d = Docket::open(plain).unwrap();
        let fails = |point: &str, violated: &str| {
            let text = format!("certificate 1 for g.d1 fails at {point} undefined [{violated}] bits 64;");
            matches!(d.decide(position(&d, "g.d1"), &[&text]).verdict, Verdict::Fails(_))
        };
        assert!(!fails("x = -1/2, p = 2", "x > 0"));
        assert!(fails("x = -1, p = 2", "x > 0"));
        assert!(fails("x = 0, p = 2", "x > 0"));
        let plain = "plain 1 of \"t\"; goal g for x : real in [-1, 1], p : real in [-3, 3] states x^p >= 0;";
        let d = Docket::open(plain).unwrap();
        let fails = |point: &str| {
            let text = format!("certificate 1 for g.d1 fails at {point} undefined [x > 0] bits 64;");
            matches!(d.decide(position(&d, "g.d1"), &[&text]).verdict, Verdict::Fails(_))
        };
        assert!(!fails("x = -1, p = 2") && !fails("x = -1, p = -1") && !fails("x = 0, p = 2"));
        assert!(fails("x = -1, p = 3/2") && fails("x = 0, p = -2") && fails("x = 0, p = 0"));
    }

    #[test]
    fn nothing_is_established_that_rests_on_something_open() {
        let d = Docket::open(PLAIN).unwrap();
        let all: Vec<Verdict> = d.obligations().iter().map(|_| Verdict::Holds).collect();
        let (facts, goals) = d.conclude(&all);
        assert!(facts.iter().chain(&goals).all(|s| s.established));
        let loose = facts.iter().find(|s| &*s.name == "loose").unwrap();
        let names = |set: &BTreeSet<Name>| set.iter().map(ToString::to_string).collect::<Vec<_>>();
        assert_eq!(names(&loose.basis.assumptions), ["is_tail", "local_mean"]);
        assert_eq!(names(&loose.basis.cited), ["markov"]);
        assert_eq!(names(&loose.basis.proved), ["cut"]);
        let mut one = all.clone();
        one[position(&d, "cut.1.s1")] = Verdict::Undecided;
        let (facts, goals) = d.conclude(&one);
        let open: Vec<&str> =
            facts.iter().chain(&goals).filter(|s| !s.established).map(|s| &*s.name).collect();
        assert_eq!(open, ["cut", "loose", "cut.1", "loose.1"]);
        assert_eq!(facts.iter().find(|s| &*s.name == "loose").unwrap().missing, ["cut.1.s1 (undecided)"]);
    }

    fn opened(text: &str) -> Docket {
        Docket::open(&format!("plain 1 of \"t\"; {text}")).unwrap()
    }

    fn verdict(d: &Docket, id: &str, certificate: &str) -> Verdict {
        d.decide(position(d, id), &[&format!("certificate 1 for {id} {certificate};")]).verdict
    }

    #[test]
    fn a_parameter_in_a_range_is_that_parameter() {
        let declared = "parameter mu : real in [0, 1]; quantity q() : real in [mu, 2*mu];";
        // A variable of its name is another number, and so is one that a step brings back.
        let d = opened(&format!("{declared} goal g for mu : real in [5, 6] states q() >= 5;"));
        assert_eq!(verdict(&d, "g", "holds {abstract u (q()) {sign}}"), Verdict::Undecided);
        let d = opened(&format!("{declared} goal g over mu states q() >= 5;"));
        let step =
            "holds {linear [q() + 5 - 5 >= 5] {forget mu {general (mu : real in [5, 5]) (5) {sign} {sign}
            {abstract u (q()) {linear [u + mu - mu >= mu] {linear (1) lo.u}}}}}}";
        assert_eq!(verdict(&d, "g", step), Verdict::Undecided);
        assert_eq!(
            verdict(
                &opened(&format!("{declared} goal g over mu states q() >= mu;")),
                "g",
                "holds {abstract u (q()) {linear (1) lo.u}}"
            ),
            Verdict::Holds
        );
        // A point must say where in its domain the parameter is.
        let d =
            opened("parameter mu : real in (0, 1]; quantity q() : real in [0, mu]; goal g states q() <= 1;");
        assert_eq!(verdict(&d, "g", "fails at mu = 5 with q() = 5 bits 64"), Verdict::Undecided);
        // q in [0, mu] is no fact about q at a smaller mu: false for q = mu = 1.
        let d = opened(
            "parameter mu : real in [0, 1]; quantity q() : real in [0, mu];
             goal g over mu states 0 <= mu^2 - 2*mu*q();",
        );
        let step = "holds {face mu lo {abstract u (q()) {linear (2) hi.u}} {sign}}";
        assert_eq!(verdict(&d, "g", step), Verdict::Undecided);
        let d = opened(
            "parameter mu : real in [0, 1]; quantity q() : real in [0, mu];
             goal g over mu for y : real in [0, q()] states 0 <= mu^2 - 2*mu*y;",
        );
        let step = "holds {face mu lo {cut [q() <= q()] {sign} {abstract u (q()) {linear (2) hi.u (2) hi.y}}} {sign}}";
        assert_eq!(verdict(&d, "g", step), Verdict::Undecided);
        // Nor may the parameters change places: false for q = x = 1, y = 0.
        let d = opened(
            "parameter x : real in [0, 1]; parameter y : real in [0, 1]; quantity q() : real in [0, x];
             goal g over x, y states 2*q() <= x + y - abs(x - y);",
        );
        let step =
            "holds {order full x y {unfold (abs(x - y)) {linear (1) h1 [0 <= 0] {sign}} {abstract u (q())
            {linear (2) hi.u}}}}";
        assert!(
            d.decide(position(&d, "g"), &[&format!("certificate 1 for g {step};")]).rejected[0]
                .detail
                .contains("moves with")
        );
    }

    #[test]
    fn a_schema_may_hide_a_quantity_but_not_from_a_fact_about_it() {
        let goal = |fact: &str| {
            opened(&format!(
                "quantity q() : real in [0, 9]; fact f : assumption {fact} states q() <= 1;
                 goal g schema q() : real in [0, 5] use f states q() <= 1;"
            ))
        };
        assert_eq!(goal("").refused()["g"].reason, Reason::Name);
    }

    #[test]
    fn properties_do_not_give_each_other_what_they_need() {
        let with = |needs: &str, uses: &str| {
            opened(&format!(
                "quantity q() : real in [0, 9];
                 fact a : cited \"A\" requires Q(q) property P(q); fact b : cited \"B\" {needs} property Q(q);
                 fact c : cited \"C\" requires P(q) states q() <= 1; goal g {uses} states q() <= 1;"
            ))
        };
        let all = "use a use b use c";
        assert!(with("requires P(q)", all).refused().contains_key("g"));
        assert!(with("given q() <= 1", "use a use c use b").refused().contains_key("g"));
        assert!(with("", all).refused().is_empty());
        assert!(with("given q() <= 9", "use b use a use c").refused().is_empty());
    }

    #[test]
    fn names_of_obligations_may_coincide() {
        let d = opened(
            "parameter x : real in [0, 1]; goal g over x states 1/x >= 1; goal g.d1 over x states x <= 1;",
        );
        let all = [Verdict::Holds, Verdict::Undecided, Verdict::Holds];
        let standings = |verdicts: &[Verdict]| -> Vec<bool> {
            d.conclude(verdicts).1.iter().map(|s| s.established).collect()
        };
        assert_eq!(standings(&all), [false, true]);
        assert_eq!(standings(&[]), [false, false], "what has no verdict is not shown");
    }
}
