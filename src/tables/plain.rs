//! Rows that are used as they stand in the file: one macro writes the raw row, the typed row and the way between.

/// Declares a row: its fields, what it is sorted by, what is checked, and how it is shown.
macro_rules! plain_row {
    (
        $(#[$doc:meta])* $name:ident from $raw:ident {
            $($(#[$field_doc:meta])* $field:ident: $kind:ty),* $(,)?
        }
        key($this:ident) $key:expr;
        check($row:ident) $check:expr;
        show($shown:ident, $f:ident) $show:expr;
    ) => {
        $(#[$doc])*
        #[derive(Clone, Debug, PartialEq)]
        pub struct $name { $($(#[$field_doc])* pub $field: $kind),* }

        #[derive(serde::Deserialize)]
        #[serde(deny_unknown_fields)]
        pub(super) struct $raw { $($field: $kind,)* source: Option<String> }

        impl super::read::RawRow for $raw {
            type Typed = $name;
            fn key(&self) -> String {
                let $this = self;
                $key
            }
            fn source(&self) -> Option<&str> {
                self.source.as_deref()
            }
            fn typed(self) -> Result<$name, String> {
                let $row = $name { $($field: self.$field),* };
                let complaint: Option<String> = $check;
                complaint.map_or(Ok($row), Err)
            }
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, $f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                let $shown = self;
                $show
            }
        }
    };
}

pub(super) use plain_row;
