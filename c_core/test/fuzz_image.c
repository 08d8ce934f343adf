/* Fuzzes the binary image: any bytes as they are, and again with a checksum that is right, so that the header's own
 * checks are reached. A sound image must give a snapshot. */
#include "fuzz_bytes.h"

#include "magnav_image.h"

#define ROOM 4096

static void evaluate(const uint8_t *bytes, size_t size)
{
    static magnav_real memory[MAGNAV_SNAPSHOT_REALS(12)];
    magnav_image image;
    magnav_snapshot snapshot;
    magnav_field_values field;

    if (magnav_image_open(bytes, size, &image) != MAGNAV_OK) {
        return;
    }
    MUST(image.degree >= 1 && image.degree <= MAGNAV_MAX_DEGREE && image.order >= 1 && image.pieces >= 1);
    if (image.degree <= 12 && magnav_image_snapshot(&image, (magnav_real)2026, 1, memory, MAGNAV_SNAPSHOT_REALS(12),
                                                    &snapshot) == MAGNAV_OK) {
        const magnav_status status = magnav_field_at(&snapshot, (magnav_real)47, (magnav_real)11, (magnav_real)0, &field);
        MUST(status == MAGNAV_OK || status == MAGNAV_E_NOT_FINITE);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static uint8_t sealed[ROOM];

    evaluate(data, size);
    if (size >= MAGNAV_IMAGE_HEADER && size + 4 <= ROOM) {
        const size_t total = size + 4;
        uint32_t crc;
        memcpy(sealed, data, size);
        memcpy(sealed, "MGNI\1\0", 6);
        for (size_t i = 0; i < 4; i++) {
            sealed[12 + i] = (uint8_t)(total >> (8 * i));
        }
        crc = magnav_crc32(sealed, size);
        for (size_t i = 0; i < 4; i++) {
            sealed[size + i] = (uint8_t)(crc >> (8 * i));
        }
        evaluate(sealed, total);
    }
    return 0;
}
