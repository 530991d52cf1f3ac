//! Tables of keys, written once: the struct, its reader and its JSON Schema.

/// Defines a record: a table of keys in a file. Each field has its documentation, whether it is
/// `required` or `optional`, and its type. The fields of the struct are all optional: a faulty one
/// is `None` after its fault was reported, so that the checks of the others still run.
macro_rules! record {
    (
        $(#[doc = $doc:literal])+
        $name:ident = $what:literal {
            $( $(#[doc = $field_doc:literal])+ $need:ident $field:ident : $type:ty, )+
        }
    ) => {
        $(#[doc = $doc])+
        #[derive(Debug, Clone, PartialEq)]
        pub struct $name {
            $( $(#[doc = $field_doc])+ pub $field: Option<$crate::yaml::At<$type>>, )+
            /// The node to blame for what is missing.
            pub owner: u32,
            /// Keys that stand in the file, readable or not.
            seen: Vec<&'static str>,
        }

        impl $name {
            /// The keys, in the order of the documentation.
            pub const ENTRIES: &'static [$crate::yaml::Entry] = &[
                $( $crate::yaml::Entry {
                    key: stringify!($field),
                    required: $crate::yaml::record!(@required $need),
                }, )+
            ];

            /// Whether a key stands in the file, even with a faulty value.
            #[allow(dead_code, reason = "only records with either-or keys need it")]
            pub fn has_key(&self, key: &str) -> bool {
                self.seen.contains(&key)
            }
        }

        impl $crate::yaml::Read for $name {
            fn read(
                node: &$crate::yaml::Node,
                reader: &mut $crate::yaml::Reader<'_>,
            ) -> Option<Self> {
                let slots = reader.slots(node, $what, Self::ENTRIES)?;
                let seen = Self::ENTRIES
                    .iter()
                    .zip(slots.seen)
                    .filter_map(|(entry, seen)| seen.then_some(entry.key))
                    .collect();
                let mut slots = slots.values.into_iter();
                Some($name {
                    $( $field: reader.field(slots.next().flatten()), )+
                    owner: node.owner,
                    seen,
                })
            }
        }

        impl schemars::JsonSchema for $name {
            fn schema_name() -> std::borrow::Cow<'static, str> {
                $what.trim_start_matches("a ").trim_start_matches("an ")
                    .trim_start_matches("the ").replace(' ', "_").into()
            }

            fn json_schema(generator: &mut schemars::SchemaGenerator) -> schemars::Schema {
                let mut properties = serde_json::Map::new();
                $( properties.insert(
                    stringify!($field).to_owned(),
                    $crate::yaml::described(
                        generator.subschema_for::<$type>(),
                        concat!($($field_doc),+).trim(),
                    ).into(),
                ); )+
                let required: Vec<&str> =
                    Self::ENTRIES.iter().filter(|e| e.required).map(|e| e.key).collect();
                schemars::json_schema!({
                    "type": "object",
                    "description": concat!($($doc),+).trim(),
                    "properties": properties,
                    "required": required,
                    "additionalProperties": false,
                })
            }
        }
    };
    (@required required) => { true };
    (@required optional) => { false };
}

pub(crate) use record;
