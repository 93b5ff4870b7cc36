//! Signatures: each digest is computed again from the record as it stood when it was signed.

use super::Check;
use crate::domain::digest::sha256_hex;
use crate::domain::subject::Kind;
use crate::domain::version::Versioned;
use crate::store::signature::Signature;
use crate::store::{
    Answer, Reader, batch, conclusion, condition, deviation, investigation, lot_decision, material_lot,
    review, shelf_life, signature, stop, trend, version,
};

pub(super) fn verify(reader: &Reader<'_>, check: &mut Check<'_>) -> Answer<()> {
    for signed in signature::all(reader)? {
        check.report.signatures += 1;
        let record = Some((signed.subject.kind.code(), signed.subject.id));
        match canonical(reader, &signed) {
            Ok(Some(text)) if sha256_hex(text.as_bytes()) == signed.digest => check.report.recomputed += 1,
            Ok(Some(_)) => {
                let sentence = format!("what {} signed is not what stands there", signed.signer_name);
                check.found(Some(signed.act), record, sentence);
            }
            Ok(None) => {
                let sentence = format!("the record that {} signed is not there", signed.signer_name);
                check.found(Some(signed.act), record, sentence);
            }
            Err(failure) => {
                let sentence = format!("what {} signed cannot be read: {failure}", signed.signer_name);
                check.found(Some(signed.act), record, sentence);
            }
        }
    }
    Ok(())
}

/// The signed text of a record as of the act of the signature; `None` where no record stands over the signature.
fn canonical(reader: &Reader<'_>, signed: &Signature) -> Answer<Option<String>> {
    let of_version = |of| Ok(Some(version::get(reader, of, signed.subject.id)?.canonical()));
    match signed.subject.kind {
        Kind::FormulationVersion => of_version(Versioned::Formulation),
        Kind::MethodVersion => of_version(Versioned::Method),
        Kind::SpecificationVersion => of_version(Versioned::Specification),
        Kind::ProtocolVersion => of_version(Versioned::Protocol),
        Kind::Sample => review::canonical(reader, signed.subject.id, Some(signed.act)).map(Some),
        Kind::BatchRecord => batch::canonical(reader, signed.subject.id, Some(signed.act)).map(Some),
        Kind::Lot => lot_decision::canonical_of_signature(reader, signed.id),
        Kind::ShelfLife => Ok(Some(shelf_life::get(reader, signed.subject.id)?.assigned.canonical())),
        Kind::Condition => condition::canonical_of(reader, signed.subject.id),
        Kind::MaterialLot => material_lot::canonical_of_signature(reader, signed.id),
        Kind::Deviation => deviation::canonical_of_signature(reader, signed.subject.id, signed.id),
        Kind::TrendEquivalence => trend::alike::canonical_of(reader, signed.subject.id),
        Kind::Conclusion => Ok(Some(conclusion::get(reader, signed.subject.id)?.text)),
        Kind::Investigation => investigation::canonical_of(reader, signed.subject.id),
        _ => Ok(stop::of_signature(reader, signed.id)?.map(|found| found.lifted.canonical())),
    }
}
