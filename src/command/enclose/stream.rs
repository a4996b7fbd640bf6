//! One request a line, one answer a line, both in JSON.

use std::collections::BTreeMap;
use std::io::{self, BufRead, Read};
use std::path::Path;

use serde::{Deserialize, Serialize};

use super::super::exit::{Done, Exit, Failure};
use super::super::output::{self, plain};
use super::compute::{Answer, answer};
use super::request::{RangeText, read};

/// Longest request, in bytes.
const MAX_LINE: u64 = 1 << 20;

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Request {
    expr: String,
    #[serde(default, rename = "box")]
    ranges: BTreeMap<String, (String, String)>,
    digits: Option<u32>,
}

#[derive(Serialize)]
#[serde(untagged)]
enum Response<'a> {
    Found { lo: Option<&'a str>, hi: Option<&'a str>, defined: &'a str },
    Wrong { error: &'a str },
}

/// Answers every line of standard input in order. A request that cannot be
/// answered gets a line with `error`, and the code is then 3.
pub fn run(digits: u32, file: Option<&Path>) -> Done {
    let mut exit = Exit::Success;
    let mut collected = file.map(|_| String::new());
    let mut input = io::stdin().lock();
    loop {
        let mut line = Vec::new();
        let length =
            Read::by_ref(&mut input).take(MAX_LINE).read_until(b'\n', &mut line).map_err(|error| {
                Failure::environment(format!("standard input cannot be read: {}", plain(&error)))
            })?;
        if length == 0 {
            break;
        }
        if length as u64 == MAX_LINE && line.last() != Some(&b'\n') {
            return Err(Failure::input(format!("a request is longer than {MAX_LINE} bytes")));
        }
        if line.iter().all(u8::is_ascii_whitespace) {
            continue;
        }
        let response = match one(&line, digits) {
            Ok(answer) => to_json(&answer),
            Err(error) => {
                exit = exit.worse(Exit::Input);
                written(&Response::Wrong { error: &error })
            }
        };
        // Each answer is written at once: the other side may wait for it.
        match &mut collected {
            Some(text) => text.push_str(&response),
            None => output::print(&response)?,
        }
    }
    if let Some(text) = collected {
        output::deliver(&text, file)?;
    }
    Ok(exit)
}

fn one(line: &[u8], digits: u32) -> Result<Answer, String> {
    let request: Request = serde_json::from_slice(line).map_err(|error| {
        format!("this is not a request such as {{\"expr\": \"exp(x)\", \"box\": {{\"x\": [\"0\", \"1\"]}}}}: {error}")
    })?;
    let digits = request.digits.unwrap_or(digits);
    if !(1..=10_000).contains(&digits) {
        return Err("`digits` must lie between 1 and 10000".to_string());
    }
    let ranges: Vec<RangeText> = request.ranges.into_iter().map(|(name, (lo, hi))| (name, lo, hi)).collect();
    answer(&read(&request.expr, &ranges)?, digits)
}

/// An answer as one line of JSON.
pub fn to_json(answer: &Answer) -> String {
    written(&match answer {
        Answer::Nowhere => Response::Found { lo: None, hi: None, defined: "nowhere" },
        Answer::Within { lo, hi, everywhere } => Response::Found {
            lo: Some(lo),
            hi: Some(hi),
            defined: if *everywhere { "everywhere" } else { "partly" },
        },
    })
}

fn written(response: &Response) -> String {
    // Texts and nothing else, which cannot fail.
    let mut text = serde_json::to_string(response).unwrap_or_default();
    text.push('\n');
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_gets_a_line() {
        let reply = |line: &str| one(line.as_bytes(), 5).map(|answer| to_json(&answer));
        let good = reply(r#"{"expr": "x^2", "box": {"x": ["-1", "2"]}}"#);
        assert_eq!(good, Ok("{\"lo\":\"0\",\"hi\":\"4\",\"defined\":\"everywhere\"}\n".into()));
        let nowhere = reply(r#"{"expr": "sqrt(x)", "box": {"x": ["-2", "-1"]}}"#);
        assert_eq!(nowhere, Ok("{\"lo\":null,\"hi\":null,\"defined\":\"nowhere\"}\n".into()));
        for wrong in [
            "",
            "{}",
            "[1]",
            r#"{"expr": 1}"#,
            r#"{"expr": "x", "box": {"x": [0, 1]}}"#,
            r#"{"expr": "x +"}"#,
        ] {
            assert!(reply(wrong).is_err(), "{wrong}");
        }
    }
}
