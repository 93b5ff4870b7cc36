//! What an act or a signature is about.

/// The kind of a record that has its own history, signature or address.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Kind {
    Site,
    Account,
    Customer,
    Product,
    Presentation,
    Material,
    Formulation,
    FormulationVersion,
    Method,
    MethodVersion,
    Specification,
    SpecificationVersion,
    ShelfLife,
    Instrument,
    MaterialLot,
    Equipment,
    Deviation,
    Lot,
    BatchRecord,
    Condition,
    Chamber,
    Protocol,
    ProtocolVersion,
    Study,
    Pull,
    Sample,
    Investigation,
    Import,
    TrendEquivalence,
    Conclusion,
    Rack,
}

impl Kind {
    pub const ALL: [Kind; 31] = [
        Kind::Site,
        Kind::Account,
        Kind::Customer,
        Kind::Product,
        Kind::Presentation,
        Kind::Material,
        Kind::Formulation,
        Kind::FormulationVersion,
        Kind::Method,
        Kind::MethodVersion,
        Kind::Specification,
        Kind::SpecificationVersion,
        Kind::ShelfLife,
        Kind::Instrument,
        Kind::MaterialLot,
        Kind::Equipment,
        Kind::Deviation,
        Kind::Lot,
        Kind::BatchRecord,
        Kind::Condition,
        Kind::Chamber,
        Kind::Protocol,
        Kind::ProtocolVersion,
        Kind::Study,
        Kind::Pull,
        Kind::Sample,
        Kind::Investigation,
        Kind::Import,
        Kind::TrendEquivalence,
        Kind::Conclusion,
        Kind::Rack,
    ];

    /// The table of the record, and the word stored beside its number.
    pub fn code(self) -> &'static str {
        match self {
            Kind::Site => "site",
            Kind::Account => "account",
            Kind::Customer => "customer",
            Kind::Product => "product",
            Kind::Presentation => "presentation",
            Kind::Material => "material",
            Kind::Formulation => "formulation",
            Kind::FormulationVersion => "formulation_version",
            Kind::Method => "method",
            Kind::MethodVersion => "method_version",
            Kind::Specification => "specification",
            Kind::SpecificationVersion => "specification_version",
            Kind::ShelfLife => "shelf_life_assignment",
            Kind::Instrument => "instrument",
            Kind::MaterialLot => "material_lot",
            Kind::Equipment => "equipment",
            Kind::Deviation => "deviation",
            Kind::Lot => "lot",
            Kind::BatchRecord => "batch_record",
            Kind::Condition => "condition",
            Kind::Chamber => "chamber",
            Kind::Protocol => "protocol",
            Kind::ProtocolVersion => "protocol_version",
            Kind::Study => "study",
            Kind::Pull => "pull",
            Kind::Sample => "sample",
            Kind::Investigation => "investigation",
            Kind::Import => "import",
            Kind::TrendEquivalence => "trend_equivalence",
            Kind::Conclusion => "evaluation_conclusion",
            Kind::Rack => "rack",
        }
    }

    pub fn from_code(code: &str) -> Option<Kind> {
        Kind::ALL.into_iter().find(|kind| kind.code() == code)
    }

    /// The kind in words, for a page.
    pub fn words(self) -> String {
        self.code().replace('_', " ")
    }
}

/// One record by kind and number.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Subject {
    pub kind: Kind,
    pub id: i64,
}

impl Subject {
    pub fn new(kind: Kind, id: i64) -> Subject {
        Subject { kind, id }
    }
}
