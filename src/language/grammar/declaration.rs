//! Statements that introduce names: parameters, quantities, definitions, numbers.

use crate::diagnostic::Code;
use crate::language::parser::{Failure, Parser, Read};
use crate::language::token::Sign;
use crate::language::tree::{
    Constant, ConstantValue, Define, Name, Numbers, Parameter, Property, Quantity, Use,
};

impl Parser<'_> {
    /// `use`: `use "path" as alias`
    pub fn use_statement(&mut self) -> Read<Use> {
        let path = self.text("the path of a file in quotes")?;
        if self.accept_word("as").is_none() {
            return match self.expected("`as` and a short name") {
                Failure::Tell(error) => {
                    let hint = format!(
                        "write `use \"{}\" as name`; its facts are then cited as `name.fact`",
                        path.text
                    );
                    Err((*error).hint(hint).into())
                }
                told => Err(told),
            };
        }
        let alias = self.name("the short name of a file")?;
        Ok(Use { path, alias })
    }

    /// `parameter`
    pub fn parameter(&mut self) -> Read<Parameter> {
        let variable = self.variable()?;
        let remark = self.remark()?;
        Ok(Parameter { variable, remark })
    }

    /// `quantity`
    pub fn quantity(&mut self) -> Read<Quantity> {
        let name = self.name("the name of a quantity")?;
        let mut arguments = Vec::new();
        if let Some(open) = self.accept(Sign::Open) {
            arguments.push(self.argument()?);
            while self.accept(Sign::Comma).is_some() {
                arguments.push(self.argument()?);
            }
            self.close(open, Sign::Close, "`,` or `)`")?;
        }
        self.expect(Sign::Colon, "`:` and the sort of its values")?;
        let sort = self.sort()?;
        let range = match self.accept_word("in") {
            Some(_) => Some(self.interval()?),
            None => None,
        };
        let remark = self.remark()?;
        Ok(Quantity { name, arguments, sort, range, remark })
    }

    /// `property`
    pub fn property(&mut self) -> Read<Property> {
        let name = self.name("the name of a property")?;
        let arguments = self.argument_names()?;
        let remark = self.remark()?;
        Ok(Property { name, arguments, remark })
    }

    /// `define`
    pub fn define(&mut self) -> Read<Define> {
        let name = self.name("the name of a definition")?;
        let arguments = self.argument_names()?;
        self.expect(Sign::Equal, "`=`")?;
        let value = self.term()?;
        let remark = self.remark()?;
        Ok(Define { name, arguments, value, remark })
    }

    /// `argument_names`, if they follow: `(s, k)`
    fn argument_names(&mut self) -> Read<Vec<Name>> {
        let mut names = Vec::new();
        if let Some(open) = self.accept(Sign::Open) {
            names.push(self.name("the name of an argument")?);
            while self.accept(Sign::Comma).is_some() {
                names.push(self.name("the name of an argument")?);
            }
            self.close(open, Sign::Close, "`,` or `)`")?;
        }
        Ok(names)
    }

    /// `constant`
    pub fn constant(&mut self) -> Read<Constant> {
        let name = self.name("the name of a constant")?;
        let value = if self.accept(Sign::Equal).is_some() {
            ConstantValue::Exact(self.term()?)
        } else if self.accept_word("in").is_some() {
            ConstantValue::Within(self.interval()?)
        } else if self.at_end() {
            let message = format!("the constant `{}` has no value", name.text);
            let error = self.problems.error(Code::MissingValue, name.span, message);
            let hint =
                "write `= value`, or `in [lower, upper]` if it is only known to lie between two numbers";
            return Err(error.hint(hint).into());
        } else {
            return Err(self.expected("`=` or `in`"));
        };
        let remark = self.remark()?;
        Ok(Constant { name, value, remark })
    }

    /// `numbers`
    pub fn numbers(&mut self) -> Read<Numbers> {
        let name = self.name("the name of a set of numbers")?;
        let remark = self.remark()?;
        self.expect(Sign::Colon, "`:` and values, as in `numbers bench: mu = 3/2`")?;
        let mut values = vec![self.binding()?];
        while self.accept(Sign::Comma).is_some() {
            values.push(self.binding()?);
        }
        Ok(Numbers { name, remark, values })
    }
}
