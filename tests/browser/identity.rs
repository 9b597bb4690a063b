//! A record names the page that made it.

use crate::page::{file, on_the_page};
use anyhow::Context;
use sha2::{Digest, Sha256};
use std::fs;

#[test]
fn the_record_names_the_page_by_its_hash_with_the_hash_itself_taken_out() {
    on_the_page(|page| async move {
        let record = page.record().await?;
        let hash = record["program"]["hash"].as_str().context("a hash in the record")?;
        let html = fs::read_to_string(file()?)?;
        assert_eq!(html.matches(hash).count(), 1, "the page holds its hash once");
        let digest = Sha256::digest(html.replacen(hash, "", 1));
        let computed: String = digest.iter().map(|byte| format!("{byte:02x}")).collect();
        assert_eq!(hash, computed);
        Ok(())
    });
}
