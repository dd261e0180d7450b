//! The page in a real Chromium: what an engineer does after a shift. Pictures are kept under the target folder, to be looked
//! at.

#![expect(clippy::unwrap_used, clippy::panic, reason = "a test stops where what it needs can't be had")]

mod driver;

use driver::Browser;
use fantoccini::Locator;
use fantoccini::key::Key;
use meterwright::demo;

const PLANT: &str = include_str!("../plants/reheat_unit.toml");
const LOG: &str = include_str!("../plants/reheat_unit.csv");

/// The log with the first main steam flow 28 t/h too high.
fn wrong_log() -> String {
    LOG.replacen("432", "460", 1)
}

/// Stores a plant and opens its page.
async fn with(plant: &str, width: u32) -> Browser {
    let browser = Browser::open(width).await;
    let ready = browser.work.plants.ready(plant).await.unwrap();
    let (name, hash) = (&ready.plant.name.value, &ready.plant.revision);
    browser.work.store.create_plant(name, hash, plant, jiff::Timestamp::now()).await.unwrap();
    browser.page.refresh().await.unwrap();
    browser.until("document.querySelector('#plant').value").await;
    browser
}

async fn with_plant(width: u32) -> Browser {
    with(PLANT, width).await
}

/// Uploads the log by rows as its user would: chooses what makes a period, and drops the file on the page.
async fn dropped(browser: &Browser) {
    let periods = browser.wait("#periods").await;
    periods.select_by_value("row").await.unwrap();
    browser.drop_file("#main", "shift.csv", &wrong_log()).await;
    browser.until("document.querySelector('#sheet tbody tr')").await;
}

#[tokio::test(flavor = "multi_thread")]
async fn a_plant_is_made_from_its_file_and_its_faults_are_shown_where_they_are() {
    let browser = Browser::open(1280).await;
    let field = browser.wait("#plant-create textarea").await;
    let wrong = PLANT.replacen("fluid = \"water\"", "fluid = \"watter\"", 1);
    let line = wrong.lines().position(|line| line.contains("watter")).unwrap() + 1;
    set(&browser, "#plant-create textarea", &wrong).await;
    browser.page.find(Locator::Css("#create-plant")).await.unwrap().click().await.unwrap();
    browser.until("document.querySelector('#plant-create').textContent.includes('watter')").await;
    let told = browser.text("#plant-create").await;
    assert!(told.contains(&line.to_string()), "line {line} is told: {told}");
    browser.picture("plant_faults").await;
    assert_eq!(field.prop("value").await.unwrap().unwrap().trim(), wrong.trim(), "nothing typed is lost");
    set(&browser, "#plant-create textarea", PLANT).await;
    browser.page.find(Locator::Css("#create-plant")).await.unwrap().click().await.unwrap();
    browser
        .until("document.querySelector('#plant').selectedOptions[0]?.textContent.includes('Tarnhope')")
        .await;
    browser.close().await;
}

/// Puts a text into a field at once, as pasting does.
async fn set(browser: &Browser, selector: &str, text: &str) {
    const PASTE: &str = "
        const field = document.querySelector(arguments[0]);
        field.value = arguments[1];
        field.dispatchEvent(new Event('input', { bubbles: true }));";
    browser.page.execute(PASTE, vec![selector.into(), text.into()]).await.unwrap();
}

#[tokio::test(flavor = "multi_thread")]
async fn a_log_is_dropped_and_the_wrong_meter_is_read_off_the_page() {
    let browser = with_plant(1280).await;
    dropped(&browser).await;
    let period = browser.wait("#period").await;
    period.select_by_index(0).await.unwrap();
    browser.until("document.querySelector('#findings')?.textContent.includes('FT-1001 reads')").await;
    let findings = browser.text("#findings").await;
    assert!(findings.contains("t/h high") && findings.contains("probability"), "{findings}");
    // The worst first: the wrong meter's row, with its half-width, its balanced value and its verdict in words.
    let first = browser.text("#sheet tbody tr").await;
    for part in ["FT-1001", "460", "t/h", "±", "suspect"] {
        assert!(first.contains(part), "{part}: {first}");
    }
    let sheet = browser.text("#sheet").await;
    assert!(
        sheet.contains("would show from") && !sheet.contains("trusted"),
        "agreement is told with what would show"
    );
    assert!(browser.text("#cautions").await.contains("lock out"));
    browser.picture("shift").await;
    // A period in which nothing is wrong says so.
    browser.wait("#period").await.select_by_index(1).await.unwrap();
    browser.until("document.querySelector('#findings')?.textContent.includes('No error found')").await;
    browser.close().await;
}

#[tokio::test(flavor = "multi_thread")]
async fn a_trend_is_opened_from_the_sheet_and_says_what_it_knows() {
    let browser = with_plant(1280).await;
    dropped(&browser).await;
    browser.page.find(Locator::Css("#sheet tbody tr a")).await.unwrap().click().await.unwrap();
    browser.until("document.querySelector('#trend canvas')").await;
    let slope = browser.text("#slope").await;
    assert!(slope.contains("3 points"), "why there is no slope: {slope}");
    assert!(browser.text("#view-trend").await.contains("1.96"), "what the band is");
    browser.picture("trend").await;
    // Back leads to the sheet again, as a link leads on.
    browser.page.back().await.unwrap();
    browser.until("!document.querySelector('#view-shift').hidden").await;
    browser.close().await;
}

#[tokio::test(flavor = "multi_thread")]
async fn a_log_with_faults_says_where_and_what_to_do() {
    let browser = with_plant(1280).await;
    browser.wait("#periods").await.select_by_value("row").await.unwrap();
    browser.drop_file("#main", "wrong.csv", &LOG.replacen("432", "43x2", 1)).await;
    browser.until("document.querySelector('#progress').textContent.includes('43x2')").await;
    let told = browser.text("#progress").await;
    assert!(told.contains("line 2") || told.contains("2:2"), "{told}");
    browser.picture("log_faults").await;
    browser.close().await;
}

#[tokio::test(flavor = "multi_thread")]
async fn everything_is_reached_by_the_keyboard_and_fits_a_telephone() {
    let browser = with_plant(390).await;
    dropped(&browser).await;
    let overflow = "document.documentElement.scrollWidth > document.documentElement.clientWidth";
    for view in ["shift", "logs", "trend", "findings", "plant"] {
        browser.until(&format!("document.querySelector(\"#views a[href*='view={view}']\")")).await;
        let link = browser.page.find(Locator::Css(&format!("#views a[href*='view={view}']"))).await.unwrap();
        link.send_keys(&Key::Enter.to_string()).await.unwrap();
        browser.until(&format!("!document.querySelector('#view-{view}').hidden")).await;
        browser.until(&format!("!({overflow})")).await;
        browser.picture(&format!("narrow_{view}")).await;
    }
    // The first key leads past the head of the page.
    browser.go("/").await;
    browser.until("document.querySelector('#plant').value").await;
    browser.page.active_element().await.unwrap().send_keys(&Key::Tab.to_string()).await.unwrap();
    let focused = browser.page.active_element().await.unwrap();
    assert_eq!(focused.attr("id").await.unwrap().as_deref(), Some("skip"));
    browser.close().await;
}

/// The demo as its user meets it: the fresh shift and a month of history; what was put into them is read off the page.
#[tokio::test(flavor = "multi_thread")]
async fn the_demo_s_shift_and_history_tell_what_was_put_into_them() {
    let browser = with(demo::PLANT, 1280).await;
    let morning = &demo::shift_logs()[0];
    browser.drop_file("#drop-zone", &morning.name, &morning.csv).await;
    browser.until("document.querySelector('#findings')?.textContent.includes('TT-4003A')").await;
    let findings = browser.text("#findings").await;
    for part in ["FT-4601 reads", "low", "boiler loses", "t/h", "TT-4003A reads"] {
        assert!(findings.contains(part), "{part}: {findings}");
    }
    assert!(
        browser.text("#rejected").await.contains("could not be balanced"),
        "the moves between loads are told"
    );
    browser.picture("demo_shift").await;
    let month = demo::months().last().unwrap();
    let periods = browser.wait("#periods").await;
    periods.select_by_value("row").await.unwrap();
    browser.drop_file("#main", "month.csv", &demo::history_log(month)).await;
    browser.until("document.querySelector('#progress').textContent.includes('745 periods balanced')").await;
    let link = browser.page.find(Locator::Css("#views a[href*='view=trend']")).await.unwrap();
    link.click().await.unwrap();
    let series = browser.wait("#series option[value='hp_turbine.efficiency']").await;
    series.click().await.unwrap();
    browser.until("document.querySelector('#slope').textContent.includes('per month')").await;
    let slope = browser.text("#slope").await;
    assert!(slope.contains("Theil-Sen") && slope.contains("95 %"), "{slope}");
    browser.until("document.querySelector('#trend canvas')").await;
    browser.picture("demo_trend").await;
    let link = browser.page.find(Locator::Css("#views a[href*='view=findings']")).await.unwrap();
    link.click().await.unwrap();
    browser.until("document.querySelector('#history').textContent.includes('FT-4703')").await;
    browser.picture("demo_findings").await;
    browser.close().await;
}
