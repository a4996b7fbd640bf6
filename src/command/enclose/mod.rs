//! `enclose`: a rigorous enclosure of an expression on a box.

mod compute;
mod exact;
mod request;
mod stream;

use super::arguments::{Enclose, Rendering};
use super::exit::{Done, Exit, Failure};
use super::output;
use compute::Answer;

/// Answers one request from the command line, or one for each line of standard input.
pub fn run(request: &Enclose) -> Done {
    if request.expression == "-" {
        if !request.ranges.is_empty() {
            return Err(Failure::input("with `-` the ranges stand in the requests, not on the command line"));
        }
        return stream::run(request.digits, request.result.output.as_deref());
    }
    let ranges = request.ranges.iter().map(|text| request::split_range(text)).collect::<Result<Vec<_>, _>>();
    let answer = ranges
        .and_then(|ranges| request::read(&request.expression, &ranges))
        .and_then(|question| compute::answer(&question, request.digits))
        .map_err(Failure::input)?;
    let text = match request.result.format {
        Rendering::Json => stream::to_json(&answer),
        Rendering::Terminal => for_people(&answer),
    };
    output::deliver(&text, request.result.output.as_deref())?;
    Ok(Exit::Success)
}

fn for_people(answer: &Answer) -> String {
    match answer {
        Answer::Nowhere => "the expression is defined nowhere on the box\n".to_string(),
        Answer::Within { lo, hi, everywhere: true } => {
            format!("[{lo}, {hi}]\ndefined everywhere on the box\n")
        }
        Answer::Within { lo, hi, everywhere: false } => {
            format!(
                "[{lo}, {hi}]\nnot shown to be defined everywhere on the box; these are all values where it is\n"
            )
        }
    }
}
