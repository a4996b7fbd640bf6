//! Entries of the handbook file as theories, and what search and kernel together
//! say about them. Shared by the example that measures and the test that guards.

use num_bigint::BigInt;
use num_rational::BigRational;
use serde_json::Value;

use boundwright::enclosure::Function;
use boundwright::expression::{Constant, End, SeriesKind, Sort, Term};
use boundwright::kernel::audit::{Docket, Verdict as Ruling};
use boundwright::search::{Effort, Outcome, Referee, Task, decide};
use boundwright::statement::{
    Context, Declaration, Domain, Goal, Origin, Parameter, Rel, Relation, Theory, Where, obligations, plain,
};

/// What is true of an entry, or was found.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Verdict {
    Holds,
    Fails,
    Vacuous,
    Undecided,
}

impl Verdict {
    pub fn name(self) -> &'static str {
        match self {
            Verdict::Holds => "holds",
            Verdict::Fails => "fails",
            Verdict::Vacuous => "vacuous",
            Verdict::Undecided => "undecided",
        }
    }
}

/// One entry. The example of false variants reads only a part of it.
#[derive(Clone)]
#[allow(dead_code)]
pub struct Entry {
    pub id: String,
    pub expected: Verdict,
    pub tags: Vec<String>,
    pub theory: Theory,
}

/// What search and kernel say.
pub struct Judged {
    pub verdict: Verdict,
    pub method: String,
    pub rejected: Vec<String>,
    #[allow(dead_code)]
    pub diary: Vec<String>,
}

/// Reads the whole file.
pub fn read(text: &str) -> Result<Vec<Entry>, String> {
    let value: Value = serde_json::from_str(text).map_err(|e| e.to_string())?;
    let list = value.as_array().ok_or("a list of entries is expected")?;
    list.iter().map(|e| entry(e).map_err(|why| format!("{}: {why}", e["id"]))).collect()
}

fn entry(e: &Value) -> Result<Entry, String> {
    let text = |v: &Value| v.as_str().map(str::to_string).ok_or(format!("a text is expected, not {v}"));
    let list = |v: &Value| v.as_array().cloned().unwrap_or_default();
    let id = text(&e["id"])?;
    let expected = match &e["truth"] {
        Value::Bool(true) => Verdict::Holds,
        Value::Bool(false) => Verdict::Fails,
        Value::String(s) if s == "undefined" => Verdict::Fails,
        Value::String(s) if s == "vacuous" => Verdict::Vacuous,
        other => return Err(format!("unknown truth {other}")),
    };
    let mut theory = Theory { stem: id.replace('-', "_"), ..Theory::default() };
    for v in list(&e["vars"]) {
        let sort = if v["type"] == "integer" { Sort::Integer } else { Sort::Real };
        let open = |key: &str| v[key].as_bool().unwrap_or(false);
        let domain = Domain {
            sort,
            lower: end(&text(&v["lo"])?)?,
            lower_open: open("lo_open"),
            upper: end(&text(&v["hi"])?)?,
            upper_open: open("hi_open"),
        };
        let declaration = Declaration { name: text(&v["name"])?.as_str().into(), domain };
        theory.parameters.push(Parameter { declaration, is_constant: false, origin: Origin::default() });
    }
    for (i, g) in list(&e["given"]).iter().enumerate() {
        let relation = relation(&text(g)?)?;
        let name = format!("given{}", i + 1).as_str().into();
        theory.wheres.push(Where { name, relation, origin: Origin::default() });
    }
    let context = Context {
        over: theory.parameters.iter().map(|p| p.declaration.name.clone()).collect(),
        under: theory.wheres.iter().map(|w| w.name.clone()).collect(),
        ..Context::default()
    };
    let claim = list(&e["claim"]).iter().map(text).collect::<Result<Vec<_>, _>>()?;
    for (i, link) in claim.windows(3).step_by(2).enumerate() {
        let sign = rel(&link[1])?;
        theory.goals.push(Goal {
            name: format!("claim.{}", i + 1).as_str().into(),
            item: "claim".into(),
            link: i + 1,
            context: context.clone(),
            uses: vec![],
            relation: Relation::new(term(&link[0])?, sign, term(&link[2])?),
            cases: vec![],
            missing: vec![],
            origin: Origin::default(),
        });
    }
    let tags = list(&e["tags"]).iter().map(text).collect::<Result<_, _>>()?;
    Ok(Entry { id, expected, tags, theory })
}

/// Searches each obligation, asks the kernel, and puts the rulings together: one
/// failure or vacuity decides, holding needs all.
pub fn judge(entry: &Entry, effort: Effort) -> Judged {
    let mut judged =
        Judged { verdict: Verdict::Holds, method: String::new(), rejected: vec![], diary: vec![] };
    let docket = match Docket::open(&plain(&entry.theory)) {
        Ok(docket) => docket,
        Err(why) => {
            judged.rejected.push(format!("plain text: {why}"));
            judged.verdict = Verdict::Undecided;
            return judged;
        }
    };
    let ours = obligations(&entry.theory);
    let (mut open, mut fails, mut vacuous) = (false, false, false);
    let mut methods: Vec<&'static str> = Vec::new();
    for (position, theirs) in docket.obligations().iter().enumerate() {
        let Some(obligation) = ours.iter().find(|o| o.id == theirs.id) else {
            judged.rejected.push(format!("the search has no obligation {}", theirs.id));
            open = true;
            continue;
        };
        let mut ruling = Ruling::Undecided;
        // A rejected certificate sends the search back with more caution.
        let examine = |sequent: &str, step: &str| {
            docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
        };
        let referee = Referee(&examine);
        for caution in 0..3 {
            let task =
                Task { obligation, signatures: &[], facts: &[], uses: &[], cases: &[], caution, referee };
            let decision = decide(&task, effort);
            judged.diary.push(format!("{}\n{}", obligation.id, decision.diary));
            let certificate = match &decision.outcome {
                Outcome::Holds { certificate, method, .. } => {
                    methods.push(method);
                    certificate
                }
                Outcome::Fails(witness) => &witness.certificate,
                Outcome::Vacuous { certificate } => certificate,
                Outcome::Undecided(u) => {
                    judged.diary.push(format!("{}: {}", obligation.id, u.reason));
                    break;
                }
            };
            let found = docket.decide(position, &[certificate]);
            if found.rejected.is_empty() {
                ruling = found.verdict;
                break;
            }
            let shown: String = certificate.chars().take(300).collect();
            judged.rejected.extend(found.rejected.iter().map(|r| format!("{r}\n\t\t{shown}")));
        }
        match ruling {
            Ruling::Holds => {}
            Ruling::Fails(_) => fails = true,
            Ruling::Vacuous => vacuous = true,
            Ruling::Undecided => open = true,
        }
    }
    methods.dedup();
    judged.method = methods.join(",");
    judged.verdict = match (vacuous, fails, open) {
        (true, _, _) => Verdict::Vacuous,
        (_, true, _) => Verdict::Fails,
        (_, _, true) => Verdict::Undecided,
        _ => Verdict::Holds,
    };
    judged
}

fn rel(sign: &str) -> Result<Rel, String> {
    Ok(match sign {
        "<=" => Rel::LessEqual,
        "<" => Rel::Less,
        "=" => Rel::Equal,
        ">=" => Rel::GreaterEqual,
        ">" => Rel::Greater,
        "!=" => Rel::NotEqual,
        _ => return Err(format!("unknown relation {sign}")),
    })
}

fn relation(text: &str) -> Result<Relation, String> {
    for sign in ["<=", ">=", "!=", "<", ">", "="] {
        if let Some((left, right)) = text.split_once(sign) {
            return Ok(Relation::new(term(left)?, rel(sign)?, term(right)?));
        }
    }
    Err(format!("no relation in {text}"))
}

fn end(text: &str) -> Result<End, String> {
    Ok(match text.trim() {
        "inf" => End::PlusInfinity,
        "-inf" => End::MinusInfinity,
        text => End::Finite(term(text)?),
    })
}

/// Reads an expression of the handbook's syntax.
pub fn term(text: &str) -> Result<Term, String> {
    let mut reader = Reader { text: text.as_bytes(), at: 0 };
    let term = reader.sum()?;
    reader.skip();
    if reader.at < reader.text.len() { Err(reader.wrong()) } else { Ok(term) }
}

struct Reader<'a> {
    text: &'a [u8],
    at: usize,
}

impl Reader<'_> {
    fn skip(&mut self) {
        while self.text.get(self.at).is_some_and(u8::is_ascii_whitespace) {
            self.at += 1;
        }
    }

    fn wrong(&self) -> String {
        format!("cannot read {} at {}", String::from_utf8_lossy(self.text), self.at)
    }

    fn takes(&mut self, sign: u8) -> bool {
        self.skip();
        let found = self.text.get(self.at) == Some(&sign);
        self.at += usize::from(found);
        found
    }

    fn sign(&mut self, sign: u8) -> Result<(), String> {
        if self.takes(sign) { Ok(()) } else { Err(self.wrong()) }
    }

    fn sum(&mut self) -> Result<Term, String> {
        let negative = self.takes(b'-');
        let first = self.product()?;
        let mut left = if negative { first.negate() } else { first };
        loop {
            if self.takes(b'+') {
                left = left.add(&self.product()?);
            } else if self.takes(b'-') {
                left = left.subtract(&self.product()?);
            } else {
                return Ok(left);
            }
        }
    }

    fn product(&mut self) -> Result<Term, String> {
        let mut left = self.power()?;
        loop {
            if self.takes(b'*') {
                left = left.multiply(&self.power()?);
            } else if self.takes(b'/') {
                left = left.divide(&self.power()?);
            } else {
                return Ok(left);
            }
        }
    }

    fn power(&mut self) -> Result<Term, String> {
        let base = self.atom()?;
        if !self.takes(b'^') {
            return Ok(base);
        }
        let negative = self.takes(b'-');
        let exponent = self.power()?;
        Ok(base.power(&if negative { exponent.negate() } else { exponent }))
    }

    fn span(&mut self, good: impl Fn(u8) -> bool) -> String {
        let start = self.at;
        while self.text.get(self.at).is_some_and(|c| good(*c)) {
            self.at += 1;
        }
        String::from_utf8_lossy(&self.text[start..self.at]).into_owned()
    }

    fn atom(&mut self) -> Result<Term, String> {
        if self.takes(b'(') {
            let inner = self.sum()?;
            self.sign(b')')?;
            return Ok(inner);
        }
        self.skip();
        match self.text.get(self.at) {
            Some(c) if c.is_ascii_digit() || *c == b'.' => {
                let digits = self.span(|c| c.is_ascii_digit() || c == b'.');
                let (whole, part) = digits.split_once('.').unwrap_or((&digits, ""));
                let value: BigInt = format!("{whole}{part}").parse().map_err(|_| self.wrong())?;
                let scale = BigInt::from(10).pow(u32::try_from(part.len()).map_err(|e| e.to_string())?);
                Ok(Term::number(BigRational::new(value, scale)))
            }
            Some(c) if c.is_ascii_alphabetic() || *c == b'_' => {
                let name = self.span(|c| c.is_ascii_alphanumeric() || c == b'_');
                if self.takes(b'(') { self.call(&name) } else { Ok(named(&name)) }
            }
            _ => Err(self.wrong()),
        }
    }

    fn call(&mut self, name: &str) -> Result<Term, String> {
        if name == "sum" {
            self.skip();
            let index = self.span(|c| c.is_ascii_alphanumeric() || c == b'_');
            self.sign(b',')?;
            let lower = self.limit()?;
            self.sign(b',')?;
            let upper = self.limit()?;
            self.sign(b',')?;
            let body = self.sum()?;
            self.sign(b')')?;
            return Ok(Term::series(SeriesKind::Sum, index.as_str(), lower, upper, body));
        }
        let function = Function::from_name(name).ok_or(format!("unknown function {name}"))?;
        let mut args = vec![self.sum()?];
        while self.takes(b',') {
            args.push(self.sum()?);
        }
        self.sign(b')')?;
        Ok(Term::apply(function, args))
    }

    fn limit(&mut self) -> Result<End, String> {
        self.skip();
        if self.text[self.at..].starts_with(b"inf") {
            self.at += 3;
            return Ok(End::PlusInfinity);
        }
        Ok(End::Finite(self.sum()?))
    }
}

fn named(name: &str) -> Term {
    match name {
        "pi" => Term::constant(Constant::Pi),
        "e" => Term::constant(Constant::E),
        _ => Term::variable(name),
    }
}
