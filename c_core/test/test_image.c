/* The binary image: every alteration refused, what is read is what was written. */
#include "check.h"

#include "magnav_image.h"
#include "wmm2025_data.h"

#define LARGEST 2048

typedef struct writer {
    uint8_t bytes[LARGEST];
    size_t size;
} writer;

static void put(writer *w, uint32_t value, int bytes)
{
    for (int i = 0; i < bytes; i++) {
        w->bytes[w->size++] = (uint8_t)(value >> (8 * i));
    }
}

static void seal(writer *w)
{
    w->size -= 4;
    put(w, magnav_crc32(w->bytes, w->size), 4);
}

/* WMM2025 as the desk writes it: tenths of nT, four bytes a value, and two for the rates. */
static writer wmm2025_image(void)
{
    const magnav_model model = wmm2025_model();
    writer w = {{0}, 0};
    const int terms = 12 * 14;
    put(&w, 0x494E474DU, 4);
    put(&w, MAGNAV_IMAGE_VERSION, 2);
    put(&w, 12, 2);
    put(&w, 2, 2);
    put(&w, 1, 2);
    put(&w, (uint32_t)(MAGNAV_IMAGE_HEADER + 8 + terms * 6 + 4), 4);
    put(&w, 20250000, 4);
    put(&w, 20300000, 4);
    for (int i = 0; i < MAGNAV_IMAGE_NAME; i++) {
        put(&w, (i < 7) ? (uint32_t) "WMM2025"[i] : 0U, 1);
    }
    for (int k = 0; k < 6; k++) {
        put(&w, (k < 2) ? 10 : 0, 4);
    }
    for (int k = 0; k < 8; k++) {
        put(&w, (k == 0) ? 4 : (k == 1) ? 2 : 0, 1);
    }
    put(&w, 20250000, 4);
    put(&w, 20300000, 4);
    for (int i = 0; i < 2 * terms; i++) {
        put(&w, (uint32_t)(int32_t)lround((double)model.polynomials[i] * 10), (i < terms) ? 4 : 2);
    }
    put(&w, 0, 4);
    seal(&w);
    return w;
}

static magnav_status open_status(const writer *w, size_t size)
{
    magnav_image image;
    magnav_status status;
    SPOIL(image);
    status = magnav_image_open(w->bytes, size, &image);
    CHECK((status == MAGNAV_OK) != is_spoilt(&image, sizeof image));
    return status;
}

static void same_bits_as_the_model(void)
{
    const writer w = wmm2025_image();
    magnav_image image;
    magnav_snapshot a;
    magnav_snapshot b;
    static magnav_real from_model[WMM_REALS];
    static magnav_real from_image[WMM_REALS];
    const magnav_model model = wmm2025_model();

    CHECK(magnav_image_open(w.bytes, w.size, &image) == MAGNAV_OK);
    CHECK(image.degree == 12 && image.order == 2 && image.pieces == 1 && strcmp(image.name, "WMM2025") == 0);
    for (int i = 0; i < 5; i++) {
        const magnav_real year = R(2023.7 + 2.1 * i);
        CHECK(magnav_snapshot_at(&model, year, 1, from_model, WMM_REALS, &a) == MAGNAV_OK);
        CHECK(magnav_image_snapshot(&image, year, 1, from_image, WMM_REALS, &b) == MAGNAV_OK);
        CHECK(a.flags == b.flags && a.degree == b.degree);
        for (int point = 0; point < 20; point++) {
            const magnav_real lat = R(spread(-90, 90));
            const magnav_real lon = R(spread(-180, 180));
            magnav_field_values one;
            magnav_field_values other;
            memset(&one, 0, sizeof one);
            memset(&other, 0, sizeof other);
            CHECK(magnav_field_at(&a, lat, lon, R(500), &one) == MAGNAV_OK);
            CHECK(magnav_field_at(&b, lat, lon, R(500), &other) == MAGNAV_OK);
            CHECK(memcmp(&one, &other, sizeof one) == 0);
        }
    }
    CHECK(magnav_image_snapshot(&image, R(2031), 0, from_image, WMM_REALS, &b) == MAGNAV_E_DATE);
    CHECK(magnav_image_snapshot(&image, R(2026), 0, from_image, WMM_REALS - 1, &b) == MAGNAV_E_MEMORY);
    CHECK(magnav_image_snapshot(&image, R(NAN), 0, from_image, WMM_REALS, &b) == MAGNAV_E_NOT_FINITE);
    CHECK(magnav_image_snapshot(NULL, R(2026), 0, from_image, WMM_REALS, &b) == MAGNAV_E_NULL);
    CHECK(magnav_image_snapshot(&image, R(2026), 0, NULL, WMM_REALS, &b) == MAGNAV_E_NULL);
    CHECK(magnav_image_snapshot(&image, R(2026), 0, from_image, WMM_REALS, NULL) == MAGNAV_E_NULL);
    image.bytes = NULL;
    CHECK(magnav_image_snapshot(&image, R(2026), 0, from_image, WMM_REALS, &b) == MAGNAV_E_NULL);
}

/* Every one-bit error is tried; two-bit errors and bursts are proved by the syndromes in tests/test_firmware_image.py. */
static void altered_images_are_refused(void)
{
    writer w = wmm2025_image();
    CHECK(open_status(&w, w.size) == MAGNAV_OK);
    for (size_t bit = 0; bit < 8 * w.size; bit++) {
        w.bytes[bit / 8] ^= (uint8_t)(1U << (bit % 8));
        CHECK(open_status(&w, w.size) == MAGNAV_E_MODEL);
        w.bytes[bit / 8] ^= (uint8_t)(1U << (bit % 8));
    }
    for (size_t size = 0; size < w.size; size++) {
        CHECK(open_status(&w, size) == MAGNAV_E_MODEL);
    }
    CHECK(open_status(&w, w.size + 1) == MAGNAV_E_MODEL);
    CHECK(magnav_image_open(NULL, w.size, NULL) == MAGNAV_E_NULL);
    CHECK(magnav_image_open(w.bytes, w.size, NULL) == MAGNAV_E_NULL);
}

/* A header changed and sealed again: the checksum is right, so the header's own checks must see it. */
static magnav_status with(size_t at, int bytes, uint32_t value)
{
    writer w = wmm2025_image();
    for (int i = 0; i < bytes; i++) {
        w.bytes[at + (size_t)i] = (uint8_t)(value >> (8 * i));
    }
    seal(&w);
    return open_status(&w, w.size);
}

static void unsound_headers_are_refused(void)
{
    CHECK(with(24, 1, 'w') == MAGNAV_OK);
    CHECK(with(0, 1, 'X') == MAGNAV_E_MODEL && with(1, 1, 'X') == MAGNAV_E_MODEL);
    CHECK(with(2, 1, 'X') == MAGNAV_E_MODEL && with(3, 1, 'X') == MAGNAV_E_MODEL);
    CHECK(with(4, 2, MAGNAV_IMAGE_VERSION + 1) == MAGNAV_E_MODEL && with(4, 2, 0) == MAGNAV_E_MODEL);
    CHECK(with(6, 2, 0) == MAGNAV_E_MODEL && with(6, 2, 11) == MAGNAV_E_MODEL && with(6, 2, 2001) == MAGNAV_E_MODEL);
    CHECK(with(8, 2, 0) == MAGNAV_E_MODEL && with(8, 2, 1) == MAGNAV_E_MODEL && with(8, 2, 7) == MAGNAV_E_MODEL);
    CHECK(with(10, 2, 0) == MAGNAV_E_MODEL && with(10, 2, 2) == MAGNAV_E_MODEL && with(10, 2, 10001) == MAGNAV_E_MODEL);
    CHECK(with(12, 4, 1096) == MAGNAV_E_MODEL);
    CHECK(with(40, 4, 0) == MAGNAV_E_MODEL && with(48, 4, 10) == MAGNAV_E_MODEL);
    CHECK(with(64, 1, 3) == MAGNAV_E_MODEL && with(64, 1, 2) == MAGNAV_E_MODEL && with(66, 1, 2) == MAGNAV_E_MODEL);
    CHECK(with(76, 4, 20250000) == MAGNAV_E_MODEL);
}

/* A sound image that this build is too small for. */
static void beyond_this_build(void)
{
    writer w = {{0}, 0};
    put(&w, 0x494E474DU, 4);
    put(&w, MAGNAV_IMAGE_VERSION, 2);
    put(&w, 1, 2);
    put(&w, 6, 2);
    put(&w, 1, 2);
    put(&w, MAGNAV_IMAGE_HEADER + 8 + 6 * 8 + 4, 4);
    put(&w, 0, 4);
    put(&w, 1, 4);
    w.size = 40;
    for (int k = 0; k < 6; k++) {
        put(&w, 10, 4);
    }
    put(&w, 0x02020202U, 4);
    put(&w, 0x00000202U, 4);
    put(&w, 0, 4);
    put(&w, 10000, 4);
    for (int k = 0; k < 6; k++) {
        put(&w, 0xFFFF8000U + (uint32_t)k, 2); /* the lowest values of 16 bits */
        put(&w, (uint32_t)-1, 2);
        put(&w, 0, 4);
    }
    put(&w, 0, 4);
    seal(&w);
    CHECK(open_status(&w, w.size) == ((MAGNAV_MAX_TIME_ORDER >= 6) ? MAGNAV_OK : MAGNAV_E_MEMORY));
    if (MAGNAV_MAX_TIME_ORDER >= 6) {
        magnav_image image;
        magnav_snapshot snapshot;
        magnav_real memory[MAGNAV_SNAPSHOT_REALS(1)];
        CHECK(magnav_image_open(w.bytes, w.size, &image) == MAGNAV_OK);
        CHECK(magnav_image_snapshot(&image, R(0), 0, memory, LENGTH(memory), &snapshot) == MAGNAV_OK);
        NEAR(memory[1], -3276.8, 3276.8 * EPSILON);
        NEAR(memory[6], -0.1, EPSILON);
    }
}

void test_image(void)
{
    /* the check value of this CRC: the published catalogue's "123456789" */
    CHECK(magnav_crc32((const uint8_t *)"123456789", 9) == 0xCBF43926U);
    same_bits_as_the_model();
    altered_images_are_refused();
    unsound_headers_are_refused();
    beyond_this_build();
}
