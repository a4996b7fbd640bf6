//! From what the kernel said to the model of the report.

use std::collections::{BTreeMap, BTreeSet};

use crate::enclosure::{BigInterval, Bits, Definedness};
use crate::expression::{End, Name, Ranges, Substitution, Term, enclose, for_people};
use crate::kernel::audit::{self, Basis, Standings};
use crate::report::{
    Audit, Constant, Dossier, Inhabitant, Item, Margin, Number, Obligation, Point, Region, RestsOn, Stuck,
    Value, Verdict, Witness, fingerprint,
};
use crate::search::{self, Outcome};
use crate::source::Place;
use crate::statement::{self, ItemKind, ObligationKind, Relation, Says, Standing, Theory};

use super::case::{Case, Found, wanted};
use super::written::joined;

/// Significant digits of decimals in reports.
const DIGITS: usize = 6;

/// Adds a dossier to the audit: all of it, or what `names` mean.
pub fn add(audit: &mut Audit, case: &Case, found: &BTreeMap<usize, Found>, names: &BTreeSet<String>) {
    let builder = Builder::new(case, found);
    audit.dossiers.push(builder.dossier());
    let obligations: Vec<Obligation> = builder
        .obligations()
        .into_iter()
        .filter(|(name, _)| wanted(name, names))
        .map(|(_, one)| one)
        .collect();
    // An item of which only one link was asked for is not judged as a whole.
    let items = case.loaded.theory.items.iter().filter(|item| wanted(&item.name, names));
    audit.items.extend(items.map(|item| builder.item(item, &obligations)));
    audit.obligations.extend(obligations);
}

struct Builder<'a> {
    case: &'a Case,
    theory: &'a Theory,
    found: &'a BTreeMap<usize, Found>,
    facts: BTreeMap<String, Standings>,
    goals: BTreeMap<String, Standings>,
}

impl<'a> Builder<'a> {
    fn new(case: &'a Case, found: &'a BTreeMap<usize, Found>) -> Builder<'a> {
        let verdicts: Vec<audit::Verdict> = (0..case.docket.obligations().len())
            .map(|position| {
                found.get(&position).map_or(audit::Verdict::Undecided, |one| one.decision.verdict.clone())
            })
            .collect();
        let (facts, goals) = case.docket.conclude(&verdicts);
        let named = |all: Vec<Standings>| all.into_iter().map(|one| (one.name.to_string(), one)).collect();
        Builder { case, theory: &case.loaded.theory, found, facts: named(facts), goals: named(goals) }
    }

    fn id(&self, name: &str) -> String {
        format!("{}.{name}", self.theory.stem)
    }

    fn dossier(&self) -> Dossier {
        let exact = self.theory.constants.iter().map(|(name, term, origin)| {
            let value = decimals(term, &Substitution::new());
            Constant {
                name: name.to_string(),
                label: origin.label.clone(),
                exact: for_people(term),
                at_least: value.as_ref().map(|value| value.at_least.clone()),
                at_most: value.map(|value| value.at_most),
            }
        });
        let known_within = self.theory.parameters.iter().filter(|one| one.is_constant).map(|one| {
            let domain = &one.declaration.domain;
            let end = |end: &End| end.finite().and_then(|term| decimals(term, &Substitution::new()));
            Constant {
                name: one.declaration.name.to_string(),
                label: one.origin.label.clone(),
                exact: domain.to_string(),
                at_least: end(&domain.lower).map(|value| value.at_least),
                at_most: end(&domain.upper).map(|value| value.at_most),
            }
        });
        Dossier {
            file: self.case.loaded.name.clone(),
            stem: self.theory.stem.clone(),
            title: self.theory.title.clone(),
            plain: self.case.plain.clone(),
            constants: exact.chain(known_within).collect(),
            numbers: self
                .theory
                .numbers
                .iter()
                .map(|set| Number { name: set.name.to_string(), values: points(&set.values) })
                .collect(),
        }
    }

    /// Every obligation that was looked at, with its name inside the dossier; goals
    /// that the kernel refuses as they stand have one of their own.
    fn obligations(&self) -> Vec<(String, Obligation)> {
        let listed = self.case.docket.obligations();
        let mut all: Vec<(String, Obligation)> = Vec::new();
        for (position, found) in self.found {
            if let Some(about) = self.case.obligation(*position) {
                let claim = listed[*position].claim();
                all.push((about.id.clone(), self.obligation(about, claim, found)));
            }
        }
        for goal in &self.theory.goals {
            if let Some(refusal) = self.case.docket.refused().get(&*goal.name) {
                all.push((goal.name.to_string(), self.refused(goal, &refusal.detail)));
            }
        }
        all
    }

    fn obligation(&self, about: &statement::Obligation, claim: String, found: &Found) -> Obligation {
        let goal = about.goal.as_ref().and_then(|name| self.theory.goal(name));
        let origin =
            goal.map(|goal| &goal.origin).or_else(|| self.theory.fact(&about.item).map(|fact| &fact.origin));
        let (file, line) = self.case.loaded.line(origin.and_then(|origin| origin.place));
        let verdict = verdict(&found.decision.verdict);
        let standing = goal.and_then(|goal| self.goals.get(&*goal.name));
        let uses = goal.map_or(&[][..], |goal| &goal.uses[..about.side_of.unwrap_or(goal.uses.len())]);
        let (established, rests_on) = match (about.kind, standing) {
            (ObligationKind::Link, Some(standing)) => (standing.established, self.rests_on(standing)),
            _ => self.joined_basis(uses.iter().map(|instance| &instance.fact)),
        };
        let statement = match (about.kind, goal) {
            (ObligationKind::Link, Some(goal)) => self.statement(goal),
            (ObligationKind::Definedness, _) => "everything written here is defined".to_string(),
            _ => about.sequent.relation().map(shown).unwrap_or_default(),
        };
        let search = found.search.as_ref();
        Obligation {
            id: self.id(&about.id),
            dossier: self.case.loaded.name.clone(),
            kind: kind_word(about.kind).to_string(),
            item: self.id(&about.item),
            link: about.link,
            file,
            line,
            statement,
            claim,
            reasons: self.reasons(uses.iter().map(|instance| instance.place)),
            verdict,
            established: verdict == Verdict::Holds && established,
            margin: search.and_then(margin).filter(|_| verdict == Verdict::Holds),
            witness: search.filter(|_| verdict == Verdict::Fails).and_then(|search| witness(search, about)),
            inhabitant: found.decision.inhabitant.as_ref().and_then(|_| search.and_then(inhabitant)),
            method: search.and_then(method).filter(|_| verdict != Verdict::Undecided),
            effort: search.map_or(0, |search| search.effort),
            rests_on,
            stuck: (verdict == Verdict::Undecided).then(|| stuck(found)),
            fingerprint: found.certificate.as_deref().map(fingerprint),
            certificate: found.certificate.clone(),
            argument: Vec::new(),
        }
    }

    /// A goal that cannot be shown whatever its relation says.
    fn refused(&self, goal: &statement::Goal, why: &str) -> Obligation {
        let (file, line) = self.case.loaded.line(goal.origin.place);
        let missing: Vec<String> = goal.missing.iter().map(ToString::to_string).collect();
        let (verdict, reason, hint) = if missing.is_empty() {
            (Verdict::Undecided, format!("the kernel refuses the step as it stands: {why}"), None)
        } else {
            let reason = format!("missing property {}", missing.join(", "));
            (
                Verdict::Fails,
                reason,
                Some("an assumption that supplies it, named among the reasons".to_string()),
            )
        };
        let (_, rests_on) = self.joined_basis(goal.uses.iter().map(|instance| &instance.fact));
        Obligation {
            id: self.id(&goal.name),
            dossier: self.case.loaded.name.clone(),
            kind: kind_word(ObligationKind::Link).to_string(),
            item: self.id(&goal.item),
            link: Some(goal.link),
            file,
            line,
            statement: self.statement(goal),
            claim: String::new(),
            reasons: self.reasons(goal.uses.iter().map(|instance| instance.place)),
            verdict,
            established: false,
            margin: None,
            witness: None,
            inhabitant: None,
            method: None,
            effort: 0,
            rests_on,
            stuck: Some(Stuck { reason, hint, ..Stuck::default() }),
            certificate: None,
            fingerprint: None,
            argument: Vec::new(),
        }
    }

    fn item(&self, item: &statement::Item, obligations: &[Obligation]) -> Item {
        let id = self.id(&item.name);
        let own: Vec<&Obligation> = obligations.iter().filter(|one| one.item == id).collect();
        let verdict = Verdict::of_parts(own.iter().map(|one| one.verdict));
        let (file, line) = self.case.loaded.line(item.origin.place);
        let statement = match self.case.written.get(&*item.name).filter(|_| !item.imported) {
            Some(written) => joined(written),
            None => {
                let goals = item.goals.iter().filter_map(|name| self.theory.goal(name));
                goals.map(|goal| shown(&goal.relation)).collect::<Vec<_>>().join(", ")
            }
        };
        // What an item says is a fact, established if everything behind it is.
        let (established, rests_on) = match self.facts.get(&*item.name) {
            Some(standing) => (standing.established, self.rests_on(standing)),
            None => {
                let goals: Vec<&Standings> =
                    item.goals.iter().filter_map(|name| self.goals.get(&**name)).collect();
                let all = goals.len() == item.goals.len() && goals.iter().all(|one| one.established);
                let basis = goals.iter().map(|one| self.rests_on(one)).fold(RestsOn::default(), merged);
                (all, basis)
            }
        };
        Item {
            id,
            dossier: self.case.loaded.name.clone(),
            kind: match item.kind {
                ItemKind::Chain => "chain",
                ItemKind::Claim => "claim",
                ItemKind::Lemma => "lemma",
            }
            .to_string(),
            title: item.origin.text.clone(),
            label: item.origin.label.clone(),
            file,
            line,
            statement,
            verdict,
            established: verdict == Verdict::Holds && established,
            obligations: own.iter().map(|one| one.id.clone()).collect(),
            rests_on,
        }
    }

    /// The relation of a goal as written, where the two can be matched.
    fn statement(&self, goal: &statement::Goal) -> String {
        let item = self.theory.items.iter().find(|item| item.name == goal.item);
        let written = item.filter(|item| !item.imported).and_then(|item| {
            let relations = self.case.written.get(&*item.name)?;
            (relations.len() == item.goals.len()).then(|| relations.get(goal.link.checked_sub(1)?))?
        });
        written.map_or_else(|| shown(&goal.relation), ToString::to_string)
    }

    /// The text at a place with white space folded.
    fn text(&self, place: Place) -> Option<String> {
        let source = self.case.loaded.sources.get(place.file)?;
        Some(source.slice(place.span).split_whitespace().collect::<Vec<_>>().join(" "))
    }

    /// The reasons as written, each once.
    fn reasons(&self, places: impl Iterator<Item = Option<Place>>) -> Vec<String> {
        let mut all: Vec<String> = Vec::new();
        for text in places.filter_map(|place| self.text(place?)) {
            if !all.contains(&text) {
                all.push(text);
            }
        }
        all
    }

    fn joined_basis<'n>(&self, facts: impl Iterator<Item = &'n Name>) -> (bool, RestsOn) {
        let mut established = true;
        let mut basis = RestsOn::default();
        for name in facts {
            if let Some(standing) = self.facts.get(&**name) {
                established &= standing.established;
                basis = merged(basis, self.rests_on(standing));
            }
            basis = merged(basis, self.sorted(&own_basis(self.theory, name)));
        }
        (established, basis)
    }

    fn rests_on(&self, standing: &Standings) -> RestsOn {
        RestsOn { unsettled: standing.missing.clone(), ..self.sorted(&standing.basis) }
    }

    /// A basis with sources beside what is cited, and properties apart.
    fn sorted(&self, basis: &Basis) -> RestsOn {
        let sourced = |names: &BTreeSet<crate::kernel::term::Name>| {
            names
                .iter()
                .map(|name| match self.theory.fact(name).map(|fact| &fact.standing) {
                    Some(Standing::Cited(source) | Standing::Argued(source)) => format!("{name} ({source})"),
                    _ => name.to_string(),
                })
                .collect()
        };
        let is_property =
            |name: &str| self.theory.fact(name).is_some_and(|fact| matches!(fact.says, Says::Property(_)));
        let (properties, assumptions) =
            basis.assumptions.iter().map(ToString::to_string).partition(|name| is_property(name));
        RestsOn {
            assumptions,
            properties,
            cited: sourced(&basis.cited),
            argued: sourced(&basis.argued),
            results: basis.proved.iter().map(ToString::to_string).collect(),
            unsettled: Vec::new(),
        }
    }
}

/// The fact itself, as part of what a use of it rests on.
fn own_basis(theory: &Theory, name: &Name) -> Basis {
    let mut basis = Basis::default();
    let kind = match theory.fact(name).map(|fact| &fact.standing) {
        Some(Standing::Assumption) => &mut basis.assumptions,
        Some(Standing::Cited(_)) => &mut basis.cited,
        Some(Standing::Argued(_)) => &mut basis.argued,
        Some(Standing::Proved(_)) => &mut basis.proved,
        None => return basis,
    };
    kind.insert((**name).into());
    basis
}

fn merged(a: RestsOn, b: RestsOn) -> RestsOn {
    let join = |a: Vec<String>, b: Vec<String>| {
        a.into_iter().chain(b).collect::<BTreeSet<_>>().into_iter().collect()
    };
    RestsOn {
        assumptions: join(a.assumptions, b.assumptions),
        cited: join(a.cited, b.cited),
        argued: join(a.argued, b.argued),
        properties: join(a.properties, b.properties),
        results: join(a.results, b.results),
        unsettled: join(a.unsettled, b.unsettled),
    }
}

/// The kernel's verdict in the words of the report.
pub fn verdict(verdict: &audit::Verdict) -> Verdict {
    match verdict {
        audit::Verdict::Holds => Verdict::Holds,
        audit::Verdict::Fails(_) => Verdict::Fails,
        audit::Verdict::Vacuous => Verdict::Vacuous,
        audit::Verdict::Undecided => Verdict::Undecided,
    }
}

const fn kind_word(kind: ObligationKind) -> &'static str {
    match kind {
        ObligationKind::Link => "link",
        ObligationKind::Side => "side",
        ObligationKind::Definedness => "definedness",
    }
}

fn shown(relation: &Relation) -> String {
    format!("{} {} {}", for_people(&relation.left), relation.rel.sign(), for_people(&relation.right))
}

fn points(values: &[(Name, Term)]) -> Vec<Point> {
    values.iter().map(|(name, value)| Point { name: name.to_string(), value: for_people(value) }).collect()
}

fn meanings(witness: &search::Witness) -> Vec<Point> {
    witness
        .meanings
        .iter()
        .map(|(name, arguments, value)| {
            let name = if arguments.is_empty() {
                name.to_string()
            } else {
                format!("{name}({})", arguments.join(", "))
            };
            Point { name, value: for_people(value) }
        })
        .collect()
}

fn margin(search: &search::Decision) -> Option<Margin> {
    let Outcome::Holds { margin: Some(margin), .. } = &search.outcome else { return None };
    Some(Margin {
        kind: "difference".to_string(),
        at_least: margin.at_least.clone(),
        at_most: margin.at_most.clone(),
        at: points(&margin.at),
    })
}

fn method(search: &search::Decision) -> Option<String> {
    match &search.outcome {
        Outcome::Holds { method, .. } => Some((*method).to_string()),
        Outcome::Fails(_) => Some("witness".to_string()),
        Outcome::Vacuous { .. } => Some("contradiction".to_string()),
        Outcome::Undecided(_) => None,
    }
}

fn witness(search: &search::Decision, about: &statement::Obligation) -> Option<Witness> {
    let Outcome::Fails(witness) = &search.outcome else { return None };
    let mut at = Substitution::new();
    for (name, value) in &witness.point {
        at.insert(name.clone(), value.clone());
    }
    let sides = about.sequent.relation().filter(|_| witness.undefined.is_none());
    Some(Witness {
        at: points(&witness.point),
        with: meanings(witness),
        undefined: witness.undefined.as_ref().map(shown),
        left: sides.and_then(|relation| decimals(&relation.left, &at)),
        right: sides.and_then(|relation| decimals(&relation.right, &at)),
    })
}

fn inhabitant(search: &search::Decision) -> Option<Inhabitant> {
    let found = search.inhabitant.as_ref()?;
    Some(Inhabitant {
        at: points(&found.point),
        with: meanings(found),
        certificate: found.certificate.clone(),
        fingerprint: fingerprint(&found.certificate),
    })
}

fn stuck(found: &Found) -> Stuck {
    let refused = found
        .decision
        .rejected
        .first()
        .map(|refusal| format!("the kernel refused the certificate: {refusal}"));
    let Some(search) = &found.search else {
        let reason =
            if found.broken { "an error of this program; please report it" } else { "nothing was tried" };
        return Stuck { reason: reason.to_string(), ..Stuck::default() };
    };
    let tried =
        search.diary.entries().iter().map(|entry| format!("{}: {}", entry.method, entry.remark)).collect();
    let told = match &search.outcome {
        Outcome::Undecided(told) => Some(told),
        _ => None,
    };
    Stuck {
        reason: refused.or_else(|| told.map(|told| told.reason.clone())).unwrap_or_default(),
        region: told.map_or_else(Vec::new, |told| {
            let sides = told.region.iter();
            sides
                .map(|(name, from, to)| Region { name: name.to_string(), from: from.clone(), to: to.clone() })
                .collect()
        }),
        hint: told.and_then(|told| told.hint.clone()),
        tried,
    }
}

/// A closed term (after putting in `at`) in decimals, rounded outward; none if it
/// cannot be enclosed or is not certainly defined.
pub fn decimals(term: &Term, at: &Substitution) -> Option<Value> {
    let bits = Bits::new(256);
    let mut defined = Definedness::Continuous;
    let value: BigInterval = enclose(&at.apply(term), &Ranges::default(), bits, &mut defined).ok()?;
    let (at_least, at_most) = value.to_decimals(DIGITS).filter(|_| defined.is_everywhere())?;
    Some(Value { at_least, at_most })
}
