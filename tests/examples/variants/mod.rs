//! False statements that are close to true ones, made from a seed.
//!
//! Some are built backwards from a known extremum, so that a witness is known;
//! others are changed entries of the handbook, kept only if the kernel certifies a
//! point at which they fail. No variant may ever be found to hold. Shared by the
//! example that measures and the test that guards.

use serde_json::{Value, json};

use boundwright::kernel::audit::{Docket, Verdict as Ruling};
use boundwright::search::{Effort, Referee, Search};
use boundwright::statement::{ObligationKind, obligations, plain};

use crate::entry::{Entry, Verdict, judge, read};

/// A false statement, and the way in which it is false.
pub struct Variant {
    /// The kind of falsity.
    pub kind: &'static str,
    /// The statement.
    pub entry: Entry,
    /// Its text, for messages.
    pub text: String,
}

/// Numbers from a seed (SplitMix64; Steele, Lea, Flood 2014).
pub struct Dice(pub u64);

impl Dice {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// A number from `low` to `high`.
    fn roll(&mut self, low: i64, high: i64) -> i64 {
        let width = u64::try_from(high - low + 1).unwrap_or(1);
        low + i64::try_from(self.next() % width).unwrap_or(0)
    }

    fn of<'a, T: ?Sized>(&mut self, all: &[&'a T]) -> &'a T {
        all[usize::try_from(self.next() % all.len() as u64).unwrap_or(0)]
    }

    fn ratio(&mut self) -> String {
        format!("({}/{})", self.roll(1, 60), self.roll(2, 17))
    }

    /// From a thousandth to a million millionth.
    fn hair(&mut self) -> String {
        format!("{}/10^{}", self.roll(1, 9), self.roll(3, 12))
    }
}

fn variable(name: &str, sort: &str, lo: &str, hi: &str) -> Value {
    json!({ "name": name, "type": sort, "lo": lo, "hi": hi, "lo_open": lo == "-inf", "hi_open": hi == "inf" })
}

fn statement(vars: Vec<Value>, given: &[String], claim: [&str; 3]) -> Value {
    json!({ "id": "variant", "vars": vars, "given": given, "claim": claim, "truth": false, "tags": [] })
}

/// A statement with a known point of failure.
fn built(dice: &mut Dice) -> (&'static str, Value) {
    let real = |lo: &str, hi: &str| vec![variable("x", "real", lo, hi)];
    let (a, b, hair) = (dice.ratio(), dice.ratio(), dice.hair());
    match dice.roll(0, 13) {
        // A square is 0 at its zero.
        0 => {
            let p = format!("(x - {a})^2*(x^2 + {b}*x + {b}^2) + {b}");
            ("known minimum", statement(real("-100", "100"), &[], [&p, ">=", &format!("{b} + {hair}")]))
        }
        1 => {
            let vars = ["x", "y", "z"].map(|v| variable(v, "real", "-inf", "inf")).to_vec();
            let p = format!("(x - {a}*y)^2 + (y - {b}*z)^2 + (x*y - 1)^2*(z - 1)^2 + (z - 1)^2*(y - {b})^2");
            ("sum of squares", statement(vars, &[], [&p, ">=", &hair]))
        }
        2 => {
            let vars = ["x", "y"].map(|v| variable(v, "real", "-20", "80")).to_vec();
            let p = format!("(x - {a})^2 + (x - {a})*(y - {b}) + (y - {b})^2");
            ("sum of squares", statement(vars, &[], [&p, ">", "0"]))
        }
        // Tangents of convex and concave functions, touched at one point.
        3 => {
            let claim = [format!("exp(x - {a})"), format!("1 + (x - {a}) + {hair}")];
            ("tangent", statement(real("-50", "100"), &[], [&claim[0], ">=", &claim[1]]))
        }
        4 => {
            let right = format!("x/{a} + log({a}) - 1 - {hair}");
            ("tangent", statement(real("1/100", "inf"), &[], ["log(x)", "<=", &right]))
        }
        5 => {
            let right = format!("exp(-1) - {hair}");
            ("tangent", statement(real("0", "inf"), &[], ["x*exp(-x)", "<=", &right]))
        }
        6 => {
            let left = format!("sin({a}*x)");
            let hi = format!("2*pi/{a}");
            ("tangent", statement(real("0", &hi), &[], [&left, "<=", &format!("1 - {hair}")]))
        }
        // False on a window about a point that nothing names.
        7 => {
            let p = format!("(x - {a})^2*(1 + x^2)");
            ("narrow window", statement(real("-10", "70"), &[], [&p, ">=", &format!("{hair}^2")]))
        }
        8 => {
            let p = format!("(exp(x) - {a})^2");
            ("narrow window", statement(real("-5", "5"), &[], [&p, ">", &format!("{hair}^2")]))
        }
        // False from some point on.
        9 => {
            let n = dice.roll(20, 400);
            let right = format!("{}*x^(1/{n})", dice.roll(1, n / 4));
            ("far out", statement(real("1", "inf"), &[], ["log(x)", "<=", &right]))
        }
        10 => {
            let n = dice.roll(2, 40);
            let left = format!("exp(x/10^{})", dice.roll(1, 12));
            ("far out", statement(real("1", "inf"), &[], [&left, "<=", &format!("10^9 + x^{n}")]))
        }
        // Undefined at one point.
        11 => {
            let p = dice.of(&[
                "1/(x - A)^2",
                "log((x - A)^2 + 0*x)^2",
                "tan(x - A + pi/2)^2",
                "x/(x^2 - A^2)^2 + 9",
            ]);
            let p = p.replace('A', &a);
            ("undefined at a point", statement(real("0", "100"), &[], [&p, ">=", "0"]))
        }
        12 => {
            let p = format!("sqrt(x - {hair}) + log(x + 1)");
            ("undefined on a window", statement(real("0", "9"), &[], [&p, ">=", "0"]))
        }
        _ => {
            let vars = vec![variable("x", "real", "0", "inf"), variable("y", "real", "0", "inf")];
            let given =
                dice.of(&["x + y <= A", "x*y >= A^2", "x^2 + y^2 <= A^2", "x <= A*y"]).replace('A', &a);
            let other = if given.contains(">=") {
                format!("x + y <= 2*{a} - {hair}")
            } else {
                format!("x >= {a}*y + {a} + 2*{a}*x")
            };
            let other = if given.starts_with("x <=") { format!("x >= {a}*y + {hair}") } else { other };
            let other = if given.contains("+ y") { format!("x + y >= 2*{a} + {hair}") } else { other };
            ("contradictory", statement(vars, &[given, other], ["x", ">=", "y + 1"]))
        }
    }
}

/// A change that may make a true statement false.
fn changed(entry: &Value, dice: &mut Dice) -> Option<(&'static str, Value)> {
    let mut new = entry.clone();
    let claim = entry["claim"].as_array()?;
    let link = 2 * usize::try_from(dice.roll(0, i64::try_from(claim.len() / 2).ok()? - 1)).ok()?;
    let text = |i: usize| claim[i].as_str().map(str::to_string);
    let (left, rel, right) = (text(link)?, text(link + 1)?, text(link + 2)?);
    let upward = rel.starts_with('<');
    let kind = match dice.roll(0, 6) {
        0 | 1 => {
            let hair = dice.hair();
            let sign = if upward { '-' } else { '+' };
            new["claim"] =
                json!([left, rel, format!("({right}) {sign} {hair}*({right})^2/(1 + ({right})^2)")]);
            "sharpened"
        }
        2 => {
            new["claim"] = json!([right, rel, left]);
            "turned"
        }
        3 => {
            let (from, to) = number(&right, dice)?;
            new["claim"] =
                json!([left, rel, format!("{}{}{}", &right[..from], dice.roll(1, 3), &right[to..])]);
            "changed factor"
        }
        4 => {
            let (from, to) = number(&left, dice)?;
            new["claim"] =
                json!([format!("{}{}{}", &left[..from], dice.roll(1, 4), &left[to..]), rel, right]);
            "changed factor"
        }
        _ => {
            let place =
                usize::try_from(dice.roll(0, i64::try_from(entry["vars"].as_array()?.len()).ok()? - 1))
                    .ok()?;
            let v = &mut new["vars"][place];
            let step = if v["type"] == "integer" { "1".to_string() } else { dice.ratio() };
            let (key, sign) = if dice.roll(0, 1) == 0 { ("lo", '-') } else { ("hi", '+') };
            let end = v[key].as_str()?.to_string();
            if end.contains("inf") {
                return None;
            }
            v[key] = json!(format!("{end} {sign} {step}"));
            v[format!("{key}_open")] = json!(false);
            new["claim"] = json!([left, rel, right]);
            "stretched domain"
        }
    };
    new["truth"] = json!(false);
    new["tags"] = json!([]);
    Some((kind, new))
}

/// The place of a number in a text, chosen by the dice.
fn number(text: &str, dice: &mut Dice) -> Option<(usize, usize)> {
    let digit = |c: char| c.is_ascii_digit() || c == '.';
    let mut places = Vec::new();
    let mut from = None;
    for (i, c) in text.char_indices().chain([(text.len(), ' ')]) {
        match (digit(c), from) {
            (true, None) => from = Some(i),
            (false, Some(start)) => {
                // Digits in a name are no number.
                if !text[..start].ends_with(|c: char| c.is_ascii_alphabetic()) {
                    places.push((start, i));
                }
                from = None;
            }
            _ => {}
        }
    }
    let last = i64::try_from(places.len()).ok()? - 1;
    if last < 0 { None } else { Some(places[usize::try_from(dice.roll(0, last)).ok()?]) }
}

/// Whether the kernel certifies a failure at one of a few simple points.
fn is_false(entry: &Entry, value: &Value, dice: &mut Dice) -> bool {
    let Ok(docket) = Docket::open(&plain(&entry.theory)) else { return false };
    let mut lists: Vec<(String, Vec<String>)> = Vec::new();
    for v in value["vars"].as_array().into_iter().flatten() {
        let (lo, hi) = (v["lo"].as_str().unwrap_or("0"), v["hi"].as_str().unwrap_or("0"));
        let integer = v["type"] == "integer";
        let mut all: Vec<String> = Vec::new();
        let plain_end = |end: &str| !end.contains("inf") && (!integer || end.parse::<i64>().is_ok());
        all.extend([lo, hi].iter().filter(|e| plain_end(e)).map(|e| format!("({e})")));
        if let (true, Ok(start)) = (integer, lo.split(' ').next().unwrap_or(lo).parse::<i64>()) {
            all.extend((-1..9).chain([20, 99]).map(|k| (start + k).to_string()));
        } else {
            let simple = ["0", "1", "2", "1/2", "3", "10", "-1", "1/100", "1/10^6", "1000", "10^9", "3/4"];
            all.extend(simple.map(str::to_string));
            if !lo.contains("inf") {
                all.extend(["1/10^9", "1/100", "1/3", "1"].map(|d| format!("({lo}) + {d}")));
            }
            if !hi.contains("inf") {
                all.extend(["1/10^9", "1/100", "1/3", "1"].map(|d| format!("({hi}) - {d}")));
            }
        }
        lists.push((v["name"].as_str().unwrap_or("x").to_string(), all));
    }
    for (position, obligation) in docket.obligations().iter().enumerate() {
        if obligation.id.contains(".d") {
            continue;
        }
        for round in 0..60_usize {
            let point: Vec<String> = lists
                .iter()
                .map(|(name, all)| {
                    // One variable: in order; several: scattered.
                    let pick = if lists.len() == 1 {
                        round
                    } else {
                        usize::try_from(dice.next() >> 40).unwrap_or(0)
                    };
                    format!("{name} = {}", all[pick % all.len().max(1)])
                })
                .collect();
            let text = format!("certificate 1 for {} fails at {} bits 256;", obligation.id, point.join(", "));
            if matches!(docket.decide(position, &[&text]).verdict, Ruling::Fails(_)) {
                return true;
            }
        }
    }
    false
}

/// `count` false statements: half of them built, half of them changed entries of
/// the handbook file `text`.
pub fn variants(text: &str, seed: u64, count: usize) -> Vec<Variant> {
    let mut dice = Dice(seed);
    let mut all = Vec::new();
    let handbook: Vec<Value> = serde_json::from_str(text).unwrap_or_default();
    let good: Vec<&Value> = handbook.iter().filter(|e| e["truth"] == true).collect();
    let known = |value: &Value| read(&json!([value]).to_string()).ok().and_then(|mut all| all.pop());
    while all.len() < count / 2 {
        let (kind, value) = built(&mut dice);
        let Some(mut entry) = known(&value) else { continue };
        if kind == "contradictory" {
            entry.expected = Verdict::Vacuous;
        }
        all.push(Variant { kind, entry, text: value.to_string() });
    }
    let mut tries = 0;
    while all.len() < count && tries < 20 * count && !good.is_empty() {
        tries += 1;
        let source = good[usize::try_from(dice.next() % good.len() as u64).unwrap_or(0)];
        let Some((kind, value)) = changed(source, &mut dice) else { continue };
        let Some(entry) = known(&value) else { continue };
        if is_false(&entry, &value, &mut dice) {
            all.push(Variant { kind, entry, text: value.to_string() });
        }
    }
    all
}

/// What was found about a variant.
pub struct Found {
    /// The verdict of search and kernel together.
    pub verdict: Verdict,
    /// Whether the search, not asked to refute anything first, proves a link of it
    /// that the kernel accepts, and all its links and conditions at that.
    pub proved: bool,
    /// Certificates that the kernel rejected.
    pub rejected: usize,
}

/// Judges a variant, and tries to prove it without looking for a counterexample.
pub fn examine(variant: &Variant, effort: Effort) -> Found {
    let judged = judge(&variant.entry, effort);
    let theory = &variant.entry.theory;
    let ours = obligations(theory);
    let proved = Docket::open(&plain(theory)).is_ok_and(|docket| {
        variant.entry.expected == Verdict::Fails
            && docket.obligations().iter().enumerate().all(|(position, theirs)| {
                let Some(one) = ours.iter().find(|o| o.id == theirs.id) else { return false };
                if one.kind == ObligationKind::Definedness {
                    // Its own verdict is the judge's; a link that is false must not pass.
                    return true;
                }
                let examine = |sequent: &str, step: &str| {
                    docket.examine(position, sequent, step).map_err(|refusal| refusal.to_string())
                };
                let mut search = Search::new(effort, 0).asking(Referee(&examine));
                let Ok(proof) = search.prove(&one.sequent) else { return false };
                let text = format!("certificate 1 for {} holds {proof};", one.id);
                docket.decide(position, &[&text]).verdict == Ruling::Holds
            })
    });
    let undefined = variant.kind.starts_with("undefined");
    Found { verdict: judged.verdict, proved: proved && !undefined, rejected: judged.rejected.len() }
}
