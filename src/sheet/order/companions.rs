//! Files that belong to a record, and how each was found.

/// How a file of a sheet was found.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    /// As the sheet was written with.
    Agrees,
    /// Other bytes than the record names.
    Edited,
    /// The bytes that the record names, and not those that are made of the record.
    NotOfRecord,
    /// Not beside the record.
    Missing,
    /// A folder, a pipe or a device.
    NoFile,
    /// There, and not to be read.
    Unreadable,
    /// Written with every such sheet, and the record does not name it.
    Unlisted,
    /// What the record has for a name is none of a file beside it.
    NoName,
}

impl Standing {
    /// What is said of the file.
    #[must_use]
    pub fn words(self) -> &'static str {
        match self {
            Self::Agrees => "is the one that the sheet was written with",
            Self::Edited => "is not the one that the sheet was written with: it was edited",
            Self::NotOfRecord => {
                "is not what is made of this record: it was edited, and its SHA-256 in the record too"
            }
            Self::Missing => "is missing: it belongs beside the record",
            Self::NoFile => "is no file: a folder, a pipe or a device stands in its place",
            Self::Unreadable => "cannot be read",
            Self::Unlisted => "is not named under `files` of the record: it was taken out by hand",
            Self::NoName => "is no name of a file beside the record, with its SHA-256",
        }
    }

    /// Whether nothing is wrong with it.
    #[must_use]
    pub fn agrees(self) -> bool {
        self == Self::Agrees
    }
}
