//! The argument of an accepted certificate in words, as one would write it beside
//! the link: read from the certificate alone, not from what the search remembers.

use crate::kernel::read;
use crate::kernel::step::{Field, Step};

/// Lines after which the rest is only counted: nobody reads more.
const MOST_LINES: usize = 120;

/// The argument, a line a step; what belongs under a step is indented by two more
/// spaces. Empty if the text is no certificate of a proof.
#[must_use]
pub fn argument(certificate: &str) -> Vec<String> {
    let Some(start) = certificate.find('{') else { return Vec::new() };
    let text = certificate[start..].trim_end().trim_end_matches(';');
    let Ok(step) = read::step(text) else { return Vec::new() };
    let mut lines = Lines { written: Vec::new(), dropped: 0 };
    tell(&step, 0, &mut lines);
    if lines.dropped > 0 {
        lines.written.push(format!("... and {} lines more", lines.dropped));
    }
    lines.written
}

struct Lines {
    written: Vec<String>,
    dropped: usize,
}

impl Lines {
    fn say(&mut self, depth: usize, words: impl AsRef<str>) {
        if self.written.len() < MOST_LINES {
            self.written.push(format!("{:1$}{2}", "", 2 * depth, words.as_ref()));
        } else {
            self.dropped += 1;
        }
    }
}

/// The fields of a step by kind, in order.
struct Parts<'a> {
    terms: Vec<String>,
    relations: Vec<String>,
    declarations: Vec<String>,
    words: Vec<&'a str>,
    numbers: Vec<String>,
    texts: Vec<&'a str>,
    steps: Vec<&'a Step>,
}

impl<'a> Parts<'a> {
    fn of(step: &'a Step) -> Parts<'a> {
        let mut parts = Parts {
            terms: Vec::new(),
            relations: Vec::new(),
            declarations: Vec::new(),
            words: Vec::new(),
            numbers: Vec::new(),
            texts: Vec::new(),
            steps: Vec::new(),
        };
        for field in &step.fields {
            match field {
                Field::Term(t) => parts.terms.push(t.to_string()),
                Field::Relation(r) => parts.relations.push(r.to_string()),
                Field::Declaration(d) => parts.declarations.push(d.to_string()),
                Field::Word(w) => parts.words.push(w),
                Field::Number(n) => parts.numbers.push(n.to_string()),
                Field::Text(t) => parts.texts.push(t),
                Field::Step(s) => parts.steps.push(s),
            }
        }
        parts
    }

    fn term(&self, i: usize) -> &str {
        self.terms.get(i).map_or("?", String::as_str)
    }

    fn word(&self, i: usize) -> &str {
        self.words.get(i).copied().unwrap_or("?")
    }

    /// The steps that carry the argument; those that only show definedness are left out.
    fn premises(&self) -> impl Iterator<Item = &'a Step> + '_ {
        self.steps.iter().copied().filter(|s| &*s.rule != "defined")
    }
}

fn tell(step: &Step, depth: usize, lines: &mut Lines) {
    let parts = Parts::of(step);
    let under = |lines: &mut Lines| parts.premises().for_each(|s| tell(s, depth + 1, lines));
    // All premises but the last stand under the sentence; the last goes on with the argument.
    let then = |lines: &mut Lines| {
        let premises: Vec<&Step> = parts.premises().collect();
        if let Some((last, before)) = premises.split_last() {
            before.iter().for_each(|s| tell(s, depth + 1, lines));
            tell(last, depth, lines);
        }
    };
    match &*step.rule {
        "abstract" => {
            lines.say(
                depth,
                format!("Write {} for {}, any value of its range.", parts.word(0), parts.term(0)),
            );
            then(lines);
        }
        "absurd" => {
            lines.say(
                depth,
                format!("What is supposed contradicts itself: {} and its negation.", relation(&parts)),
            );
            under(lines);
        }
        "both" => {
            lines.say(depth, both(&parts));
            then(lines);
        }
        "boxes" => {
            lines.say(depth, boxes(parts.texts.first().copied().unwrap_or("")));
            under(lines);
        }
        "cases" | "defined" => {
            for (condition, proof) in parts.relations.iter().zip(&parts.steps) {
                let head = if &*step.rule == "cases" { "Case" } else { "It needs" };
                lines.say(depth, format!("{head} {condition}:"));
                tell(proof, depth + 1, lines);
            }
        }
        "change" => {
            let new = parts.declarations.first().map_or("?", String::as_str);
            lines.say(depth, format!("Put {} = {}, with {new}.", parts.word(0), parts.term(0)));
            then(lines);
        }
        "cut" => {
            lines.say(depth, format!("First, {}:", relation(&parts)));
            then(lines);
        }
        "empty" => lines.say(depth, format!("The domain of {} is empty.", parts.word(0))),
        "enclose" => lines.say(depth, "Its enclosure over the whole domain decides."),
        "face" => {
            let (way, end) =
                if parts.word(1) == "lo" { ("increasing", "lower") } else { ("decreasing", "upper") };
            let x = parts.word(0);
            lines.say(depth, format!("Right minus left is {way} in {x}: take {x} at its {end} end."));
            then(lines);
        }
        "forget" => {
            lines.say(depth, format!("Without {}.", parts.words.join(", ")));
            then(lines);
        }
        "general" => {
            let new = parts.declarations.first().map_or("?", String::as_str);
            lines.say(depth, format!("Write {new} for {}.", parts.term(0)));
            then(lines);
        }
        "identity" => lines.say(depth, "Both sides are the same after multiplying out."),
        "known" | "law" => {
            let name = parts.texts.first().copied().unwrap_or("?");
            lines.say(depth, format!("By {} for {}:", name.replace('-', " "), parts.terms.join(", ")));
            then(lines);
        }
        "ladder" => ladder(&parts, depth, lines),
        "linear" => {
            lines.say(depth, linear(&parts));
            under(lines);
        }
        "narrow" => {
            lines.say(depth, format!("{} is an end of the domain.", reference(parts.word(0))));
            then(lines);
        }
        "quadratic" => {
            lines.say(depth, format!("A quadratic in {} without a real zero inside:", parts.term(0)));
            under(lines);
        }
        "relax" => {
            lines.say(depth, format!("Let {} be real.", parts.word(0)));
            then(lines);
        }
        "replace" => {
            lines.say(depth, format!("Replace {} by its bound {}.", parts.term(0), parts.term(1)));
            then(lines);
        }
        "scale" => {
            lines.say(
                depth,
                format!("Take out the positive factor {}: {} is left.", parts.term(0), relation(&parts)),
            );
            then(lines);
        }
        "shift" => {
            let from: Vec<String> = parts
                .words
                .chunks_exact(2)
                .map(|w| format!("the {} end of {}", if w[1] == "lo" { "lower" } else { "upper" }, w[0]))
                .collect();
            lines.say(depth, format!("Counted from {}, all coefficients have one sign.", from.join(", ")));
        }
        "sign" => lines.say(depth, "The sign is plain from the parts."),
        "split" => {
            lines.say(depth, format!("Up to {} = {} and from there on:", parts.word(0), parts.term(0)));
            under(lines);
        }
        "strengthen" => {
            lines.say(depth, format!("Integers: sharpen {}.", reference(parts.word(0))));
            then(lines);
        }
        "substitute" => {
            lines.say(depth, format!("Put in {}.", reference(parts.word(0))));
            then(lines);
        }
        "unfold" => {
            lines.say(depth, format!("By the definition of {}:", parts.term(0)));
            under(lines);
        }
        "arrange" | "widen" => then(lines),
        "bernstein" => {
            let names = parts.words.join(", ");
            lines.say(
                depth,
                format!("In the Bernstein basis of the range of {names}, all coefficients have one sign."),
            );
        }
        "convex" => {
            let by = if parts.word(0) == "tangent" {
                "It lies above its tangent"
            } else {
                "By Jensen's inequality"
            };
            lines.say(depth, format!("{by}, for the convex {}:", parts.term(0)));
            then(lines);
        }
        "descend" => {
            let x = parts.word(0);
            lines.say(
                depth,
                format!("It does not grow from {x} to {x} + 1, and is not negative towards infinity:"),
            );
            under(lines);
        }
        "factor" => {
            lines.say(depth, format!("It is the product of {} and {}:", parts.term(0), parts.term(1)));
            under(lines);
        }
        "induct" => {
            lines.say(depth, format!("By induction on {}:", parts.word(0)));
            under(lines);
        }
        "order" => {
            let names = &parts.words[1.min(parts.words.len())..];
            let what = if parts.word(0) == "full" {
                names.join(" <= ")
            } else {
                format!("{} is the least", parts.word(1))
            };
            lines.say(depth, format!("By symmetry let {what}."));
            then(lines);
        }
        "roots" => lines.say(depth, format!("A Sturm chain counts its zeros in {}.", parts.word(0))),
        "series" => {
            let how = match parts.word(0) {
                "last" => "Take off the last term of",
                "first" => "Take off the first term of",
                "empty" => "Nothing is in",
                "join" => "Take apart",
                "shift" => "Move the index of",
                _ => "Rewrite",
            };
            lines.say(depth, format!("{how} {}.", parts.term(0)));
            then(lines);
        }
        "squares" => squares(&parts, depth, lines),
        "touch" => {
            lines.say(
                depth,
                format!(
                    "Convex on the domain, and stationary at ({}), where it is not negative.",
                    parts.terms.join(", ")
                ),
            );
        }
        other => {
            let about: Vec<&str> =
                parts.words.iter().copied().chain(parts.terms.iter().map(String::as_str)).collect();
            let about = if about.is_empty() { String::new() } else { format!(" ({})", about.join(", ")) };
            lines.say(depth, format!("By the rule `{other}`{about}:"));
            under(lines);
        }
    }
}

fn relation<'a>(parts: &'a Parts) -> &'a str {
    parts.relations.first().map_or("?", String::as_str)
}

/// `h3`, `lo.x`, `hi.x` in words.
fn reference(word: &str) -> String {
    if let Some(x) = word.strip_prefix("lo.") {
        return format!("the lower end of {x}");
    }
    if let Some(x) = word.strip_prefix("hi.") {
        return format!("the upper end of {x}");
    }
    match word.strip_prefix('h') {
        Some(number) => format!("supposition {number}"),
        None => word.to_string(),
    }
}

fn both(parts: &Parts) -> String {
    match parts.word(0) {
        "log" => "Take logarithms; both sides are positive.".into(),
        "exp" => "Apply exp to both sides.".into(),
        "square" => "Square both sides; the larger is not negative.".into(),
        "odd" => {
            format!("Take the power {} of both sides.", parts.numbers.first().map_or(parts.term(0), |n| n))
        }
        "power" => format!("Take the power {} of both sides; they are not negative.", parts.term(0)),
        "reciprocal" => "Take reciprocals; both sides are positive.".into(),
        other => format!("Apply {other} to both sides."),
    }
}

/// How many boxes were settled in which way, from the code of the tree.
fn boxes(code: &str) -> String {
    let count = |letter| code.chars().filter(|c| *c == letter).count();
    let kinds = [
        ('N', "by interval enclosure"),
        ('S', "by the mean value form"),
        ('T', "by Taylor's formula"),
        ('H', "excluded by what is supposed"),
        ('X', "by an argument of their own"),
    ];
    let parts: Vec<String> = kinds
        .iter()
        .map(|(letter, words)| (count(*letter), words))
        .filter(|(n, _)| *n > 0)
        .map(|(n, words)| format!("{n} {words}"))
        .collect();
    let all: usize = kinds.iter().map(|(letter, _)| count(*letter)).sum();
    let noun = if all == 1 { "box" } else { "boxes" };
    format!("Split into {all} {noun}: {}.", parts.join(", "))
}

fn linear(parts: &Parts) -> String {
    let uses: Vec<String> = parts
        .terms
        .iter()
        .zip(&parts.words)
        .map(|(m, word)| if m == "1" { reference(word) } else { format!("{m} times {}", reference(word)) })
        .collect();
    match (uses.is_empty(), parts.relations.first()) {
        (true, Some(rest)) => format!("After multiplying out, {rest} is left:"),
        (true, None) => "Multiply out.".into(),
        (false, Some(rest)) => format!("Add {}; {rest} is left:", uses.join(", ")),
        (false, None) => format!("Add {}.", uses.join(", ")),
    }
}

fn squares(parts: &Parts, depth: usize, lines: &mut Lines) {
    let multiplier = if parts.term(0) == "1" { String::new() } else { format!(" times {}", parts.term(0)) };
    lines.say(depth, format!("Right minus left{multiplier} is the sum of:"));
    for step in parts.premises() {
        let own = Parts::of(step);
        let behind: Vec<String> = own.words.iter().map(|word| reference(word)).collect();
        let times =
            if behind.is_empty() { String::new() } else { format!(" times {}", behind.join(" times ")) };
        match &*step.rule {
            "square" => {
                lines.say(depth + 1, format!("{} times the square of {}{times}", own.term(0), own.term(1)))
            }
            "times" => lines.say(depth + 1, format!("{}{times}", own.term(0))),
            _ => tell(step, depth + 1, lines),
        }
    }
}

fn ladder(parts: &Parts, depth: usize, lines: &mut Lines) {
    let x = parts.word(0);
    lines.say(depth, format!("The sign of right minus left along {x}, from its derivatives:"));
    for step in parts.premises() {
        let own = Parts::of(step);
        match &*step.rule {
            "level" => {
                let sign = |word: &str| if word == "plus" { "not negative" } else { "not positive" };
                let ends: Vec<String> = own
                    .words
                    .chunks_exact(2)
                    .map(|w| {
                        let end = if w[0] == "from" { "lower" } else { "upper" };
                        format!("; towards the {end} end it is {}", sign(w[1]))
                    })
                    .collect();
                let (m, h, k, next) = (own.term(0), own.term(1), own.term(2), own.term(3));
                let head = if m == "1" { format!("it is {h}") } else { format!("times {m} it is {h}") };
                let slope = if k == "1" { next.to_string() } else { format!("({k}) times ({next})") };
                lines.say(depth + 1, format!("{head}{}; its derivative is {slope}", ends.concat()));
            }
            "leaf" => {
                let words = match own.word(0) {
                    "plus" | "positive" => "that derivative is not negative:".to_string(),
                    "minus" | "negative" => "that derivative is not positive:".to_string(),
                    "cut" => format!("that derivative changes its sign at {} only:", own.term(0)),
                    "coefficients" => "the signs of the coefficients of that derivative decide.".to_string(),
                    other => format!("that derivative, by {other}:"),
                };
                lines.say(depth + 1, words);
                own.premises().for_each(|s| tell(s, depth + 2, lines));
            }
            "lower" | "upper" => {
                lines.say(depth + 1, format!("at the {} end itself:", step.rule));
                own.premises().for_each(|s| tell(s, depth + 2, lines));
            }
            _ => tell(step, depth + 1, lines),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn told(step: &str) -> Vec<String> {
        argument(&format!("certificate 1 for a.b.1 holds {step};"))
    }

    #[test]
    fn a_proof_reads_like_an_argument() {
        assert_eq!(
            told("{both log {sign} {sign} {face x lo {sign} {boxes 62 \"aNaNS\"}}}"),
            [
                "Take logarithms; both sides are positive.",
                "  The sign is plain from the parts.",
                "  The sign is plain from the parts.",
                "Right minus left is increasing in x: take x at its lower end.",
                "  The sign is plain from the parts.",
                "Split into 3 boxes: 2 by interval enclosure, 1 by the mean value form.",
            ]
        );
        assert_eq!(
            told("{linear (1) h1 (2*x) hi.x [0 <= y] {sign}}"),
            [
                "Add supposition 1, 2*x times the upper end of x; 0 <= y is left:",
                "  The sign is plain from the parts."
            ]
        );
    }

    #[test]
    fn a_ladder_names_its_functions_and_ends() {
        let step = "{ladder x {level (1) (exp(x) - 1 - x) (1) (exp(x) - 1) from plus} {leaf plus {sign}}}";
        assert_eq!(
            told(step),
            [
                "The sign of right minus left along x, from its derivatives:",
                "  it is exp(x) - 1 - x; towards the lower end it is not negative; its derivative is exp(x) - 1",
                "  that derivative is not negative:",
                "    The sign is plain from the parts.",
            ]
        );
    }

    #[test]
    fn every_rule_of_the_kernel_has_words() {
        let guide = include_str!("../../DEVELOPERS.md");
        let table = guide.split("| rule | says |").nth(1).unwrap().split("\n\n").next().unwrap();
        let names = table
            .lines()
            .filter_map(|row| row.strip_prefix("| `"))
            .map(|row| row.split(" | ").next().unwrap());
        let names: Vec<&str> =
            names.flat_map(|cell| cell.split('`').filter(|n| n.chars().all(char::is_alphabetic))).collect();
        assert!(names.len() > 25);
        for name in names.into_iter().filter(|name| !name.is_empty()) {
            let words = told(&format!("{{{name}}}"));
            assert!(words.iter().all(|line| !line.contains("By the rule")), "{name}: {words:?}");
        }
        assert_eq!(told("{unheard x (y)}"), ["By the rule `unheard` (x, y):"]);
    }

    #[test]
    fn what_is_no_proof_has_no_argument_and_long_ones_are_cut() {
        assert!(argument("certificate 1 for a fails at x = 1 bits 64;").is_empty());
        assert!(argument("").is_empty());
        let long = format!("{}{{sign}}{}", "{relax n ".repeat(90), "}".repeat(90));
        assert!(told(&long).len() <= MOST_LINES + 1);
        let wide = format!("{{absurd [x <= 1] {}}}", "{sign} ".repeat(500));
        assert_eq!(told(&wide).len(), MOST_LINES + 1);
        assert!(told(&wide)[MOST_LINES].contains("lines more"));
    }
}
