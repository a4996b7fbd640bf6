//! The text the kernel reads: the syntax of `grammar/claim.ebnf`.

use std::collections::BTreeMap;
use std::fmt::{self, Display, Formatter, Write};

use crate::expression::Name;

use super::theory::{Context, Fact, Goal, Proof, Says, Standing, Theory, Use};

/// The plain form of a theory.
#[must_use]
pub fn plain(theory: &Theory) -> String {
    let mut text = String::new();
    // Writing into a String cannot fail.
    let _ = write_theory(&mut text, theory);
    text
}

fn write_theory(f: &mut String, theory: &Theory) -> fmt::Result {
    writeln!(f, "plain 1 of {};", Quoted(&theory.stem))?;
    for parameter in &theory.parameters {
        writeln!(f, "parameter {};", parameter.declaration)?;
    }
    for condition in &theory.wheres {
        writeln!(f, "where {} states {};", condition.name, condition.relation)?;
    }
    for quantity in &theory.quantities {
        writeln!(f, "quantity {};", quantity.signature)?;
    }
    // A fact stands after the goals that prove it and before the goals that use it.
    let places: BTreeMap<&Name, usize> = theory.goals.iter().enumerate().map(|(i, g)| (&g.name, i)).collect();
    let mut written = 0;
    for fact in &theory.facts {
        if let Standing::Proved(proof) = &fact.standing {
            let needed = proof.goals().into_iter().filter_map(|n| places.get(n)).max().map_or(0, |i| i + 1);
            for goal in theory.goals.iter().take(needed).skip(written) {
                write_goal(f, goal)?;
            }
            written = written.max(needed);
        }
        write_fact(f, fact)?;
    }
    theory.goals.iter().skip(written).try_for_each(|goal| write_goal(f, goal))
}

fn write_fact(f: &mut String, fact: &Fact) -> fmt::Result {
    write!(f, "fact {} :", fact.name)?;
    match &fact.standing {
        Standing::Assumption => f.write_str(" assumption")?,
        Standing::Cited(source) => write!(f, " cited {}", Quoted(source))?,
        Standing::Argued(where_) => write!(f, " argued {}", Quoted(where_))?,
        Standing::Proved(Proof::Chain(goals)) => write!(f, " proved chain {}", goals.join(", "))?,
        Standing::Proved(Proof::All(goals)) => write!(f, " proved all {}", goals.join(", "))?,
        Standing::Proved(Proof::Induction { variable, base, step }) => {
            write!(f, " proved induction {variable} base {base} step {step}")?;
        }
    }
    write_context(f, &fact.context)?;
    match &fact.says {
        Says::Relations(relations) => write!(f, "\n  states {}", Listed(relations))?,
        Says::Property(property) => write!(f, "\n  property {property}")?,
    }
    f.write_str(";\n")
}

fn write_goal(f: &mut String, goal: &Goal) -> fmt::Result {
    write!(f, "goal {}", goal.name)?;
    write_context(f, &goal.context)?;
    for instance in &goal.uses {
        write_use(f, instance)?;
    }
    writeln!(f, "\n  states {};", goal.relation)
}

fn write_context(f: &mut String, context: &Context) -> fmt::Result {
    let Context { over, under, schema, variables, given, requires } = context;
    if !over.is_empty() {
        write!(f, "\n  over {}", over.join(", "))?;
    }
    if !under.is_empty() {
        write!(f, "\n  under {}", under.join(", "))?;
    }
    if !schema.is_empty() {
        write!(f, "\n  schema {}", Listed(schema))?;
    }
    if !variables.is_empty() {
        write!(f, "\n  for {}", Listed(variables))?;
    }
    if !given.is_empty() {
        write!(f, "\n  given {}", Listed(given))?;
    }
    if !requires.is_empty() {
        write!(f, "\n  requires {}", Listed(requires))?;
    }
    Ok(())
}

fn write_use(f: &mut String, instance: &Use) -> fmt::Result {
    write!(f, "\n  use {}", instance.fact)?;
    if instance.bindings.is_empty() && instance.renamings.is_empty() {
        return Ok(());
    }
    let bindings: Vec<String> = instance.bindings.iter().map(|(x, t)| format!("{x} = {t}")).collect();
    let renamings: Vec<String> = instance.renamings.iter().map(|(q, p)| format!("{q} = {p}")).collect();
    match (bindings.is_empty(), renamings.is_empty()) {
        (false, true) => write!(f, "({})", bindings.join(", ")),
        (true, _) => write!(f, "(; {})", renamings.join(", ")),
        (false, false) => write!(f, "({}; {})", bindings.join(", "), renamings.join(", ")),
    }
}

struct Listed<'a, T>(&'a [T]);

impl<T: Display> Display for Listed<'_, T> {
    fn fmt(&self, f: &mut Formatter<'_>) -> fmt::Result {
        for (i, item) in self.0.iter().enumerate() {
            write!(f, "{}{item}", if i > 0 { ", " } else { "" })?;
        }
        Ok(())
    }
}

/// A text in quotes. The plain form has no escapes, so what it cannot hold is replaced.
struct Quoted<'a>(&'a str);

impl Display for Quoted<'_> {
    fn fmt(&self, f: &mut Formatter<'_>) -> fmt::Result {
        f.write_char('"')?;
        for c in self.0.chars() {
            f.write_char(match c {
                '"' => '\'',
                c if c.is_control() => ' ',
                c => c,
            })?;
        }
        f.write_char('"')
    }
}
