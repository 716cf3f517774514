//! A table file with its parameters set: the values in `[parameters]` are replaced in the text, everything else stays.

use thiserror::Error;
use toml::de::{DeTable, DeValue};

/// Why parameters could not be set.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum SettingFault {
    /// The file is not valid TOML; reading it as a table says where.
    #[error("the table file is not valid TOML")]
    NotToml,
    /// There is no such parameter.
    #[error("the table file has no parameter `{name}`; {known}")]
    Unknown {
        /// The name.
        name: String,
        /// Which parameters there are, as a sentence.
        known: String,
    },
}

/// The text with each named parameter set to an expression.
///
/// # Errors
/// When a parameter is not in the file.
pub fn with_settings(text: &str, settings: &[(&str, &str)]) -> Result<String, SettingFault> {
    let document = DeTable::parse(text).map_err(|_| SettingFault::NotToml)?;
    let parameters = document.get_ref().get("parameters").map(|v| v.get_ref());
    let parameters = match parameters {
        Some(DeValue::Table(parameters)) => Some(parameters),
        _ => None,
    };
    let mut places = Vec::new();
    for (name, value) in settings {
        let found = parameters.and_then(|table| table.get(*name));
        let Some(found) = found else {
            let names: Vec<String> = parameters
                .iter()
                .flat_map(|table| table.keys())
                .map(|key| format!("`{}`", key.get_ref()))
                .collect();
            return Err(SettingFault::Unknown {
                name: (*name).into(),
                known: match names.len() {
                    0 => "it has none: add a line `t = \"1/3\"` under `[parameters]`".into(),
                    _ => format!("it has {}", names.join(", ")),
                },
            });
        };
        places.push((found.span(), *value));
    }
    places.sort_by_key(|(span, _)| std::cmp::Reverse(span.start));
    let mut text = text.to_string();
    for (span, value) in places {
        // An expression that was evaluated holds neither quotes nor backslashes.
        text.replace_range(span, &format!("\"{value}\""));
    }
    Ok(text)
}

#[cfg(test)]
mod tests {
    use super::*;

    const TEXT: &str = "title = \"T\"\n[parameters]\nt = \"1/3\" # a remark\nlong = 4\n";

    #[test]
    fn values_are_replaced_where_they_stand() {
        let set = with_settings(TEXT, &[("long", "sqrt(2)"), ("t", "2/5")]).unwrap();
        assert_eq!(
            set,
            "title = \"T\"\n[parameters]\nt = \"2/5\" # a remark\nlong = \"sqrt(2)\"\n"
        );
    }

    #[test]
    fn unknown_names_are_told_with_the_known_ones() {
        let fault = with_settings(TEXT, &[("u", "1")]).unwrap_err();
        assert!(fault.to_string().contains("it has `long`, `t`"), "{fault}");
        let fault = with_settings("title = \"T\"", &[("u", "1")]).unwrap_err();
        assert!(fault.to_string().contains("it has none"));
        assert_eq!(with_settings("x = ", &[]), Err(SettingFault::NotToml));
    }
}
