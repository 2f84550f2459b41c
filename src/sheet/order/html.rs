//! The page: one file without script, network or reference to anything outside.

use super::content::{Content, content};
use super::document::Document;
use super::figures::Figures;
use minijinja::syntax::SyntaxConfig;
use minijinja::value::{Serde, Value};
use minijinja::{AutoEscape, Environment, context};

/// The skeleton, and what every kind of block becomes.
const PAGE: &str = include_str!("html/page.html");
const STYLE: &str = include_str!("html/style.css");

impl Document {
    /// The sheet as a page.
    ///
    /// # Panics
    ///
    /// Never: the template is part of the program, and a test renders every kind of block.
    #[must_use]
    pub fn html(&self, figures: &Figures) -> String {
        let content: Content = content(self);
        let mut environment = Environment::new();
        environment.set_auto_escape_callback(|_| AutoEscape::Html);
        let syntax = SyntaxConfig::builder()
            .trim_blocks(true)
            .lstrip_blocks(true)
            .build();
        environment.set_syntax(syntax.expect("the delimiters are those of every template"));
        environment
            .add_template("page", PAGE)
            .expect("the template is part of the program");
        let svgs: Vec<Option<Value>> = (0..)
            .take(figures.count())
            .map(|number| {
                figures
                    .get(number)
                    .map(|it| Value::from_safe_string(it.svg()))
            })
            .collect();
        let template = environment.get_template("page").expect("just added");
        template
            .render(context! {
                content => Serde(content),
                figures => svgs,
                style => Value::from_safe_string(STYLE.to_owned()),
            })
            .expect("the template knows every kind of block")
    }
}
