//! `facts`: what may be cited in a dossier, with its hypotheses.

use crate::expression::for_people;
use crate::report::{FACTS_SCHEMA, Fact, FactSheet, Tool};
use crate::statement::{self, Relation, Says, Standing};

use super::arguments::{Facts, Rendering};
use super::dossier::{Loaded, load};
use super::exit::{Done, Exit, Failure};
use super::{files, output};

/// Lists the facts of one dossier.
pub fn run(request: &Facts) -> Done {
    let dossiers = files::gather(std::slice::from_ref(&request.path))?;
    let [dossier] = dossiers.as_slice() else {
        return Err(Failure::input("`facts` lists what may be cited in one dossier; name a file"));
    };
    let loaded = load(dossier)?;
    let sheet = FactSheet {
        schema: FACTS_SCHEMA.to_string(),
        tool: Tool::this(),
        file: loaded.name.clone(),
        title: loaded.theory.title.clone(),
        facts: loaded.theory.facts.iter().map(|fact| about(&loaded, fact)).collect(),
    };
    let text = match request.result.format {
        Rendering::Json => sheet.to_json(),
        Rendering::Terminal => sheet.to_terminal(output::style(request.result.output.as_deref())),
    };
    output::deliver(&text, request.result.output.as_deref())?;
    Ok(Exit::Success)
}

fn about(loaded: &Loaded, fact: &statement::Fact) -> Fact {
    let (file, line) = loaded.line(fact.origin.place);
    let (standing, source) = match &fact.standing {
        Standing::Assumption => ("assumption", None),
        Standing::Cited(source) => ("cited", Some(source.clone())),
        Standing::Argued(place) => ("argued", Some(place.clone())),
        Standing::Proved(_) => ("proved", None),
    };
    let context = &fact.context;
    Fact {
        name: fact.name.to_string(),
        standing: standing.to_string(),
        source,
        title: fact.origin.text.clone(),
        file,
        line,
        schema: context.schema.iter().map(ToString::to_string).collect(),
        variables: context.variables.iter().map(ToString::to_string).collect(),
        given: context.given.iter().map(relation).collect(),
        requires: context.requires.iter().map(ToString::to_string).collect(),
        states: match &fact.says {
            Says::Relations(relations) => relations.iter().map(relation).collect(),
            Says::Property(property) => vec![property.to_string()],
        },
    }
}

fn relation(relation: &Relation) -> String {
    format!("{} {} {}", for_people(&relation.left), relation.rel.sign(), for_people(&relation.right))
}
