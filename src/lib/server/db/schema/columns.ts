import { sql } from 'drizzle-orm';
import { customType, datetime } from 'drizzle-orm/mysql-core';

/** Case-sensitive text: ids, hashes, formulas ('CO' is not 'Co'). MariaDB's default collation ignores case. */
export const exact = (name: string, length: number) =>
  customType<{ data: string; driverData: string }>({
    dataType: () => `varchar(${length}) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin`
  })(name);

/** Packed arrays, up to 16 MB. */
export const mediumblob = (name: string) =>
  customType<{ data: Buffer; driverData: Buffer }>({ dataType: () => 'mediumblob' })(name);

/** Text up to 4 GB, for frozen revisions. */
export const longtext = (name: string) =>
  customType<{ data: string; driverData: string }>({
    dataType: () => 'longtext CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin'
  })(name);

/** 36-character UUID made by the service (crypto.randomUUID). */
export const uuid = (name: string) => exact(name, 36);

/** UTC instant to the millisecond. */
export const instant = (name: string) => datetime(name, { fsp: 3, mode: 'date' });

export const createdAt = () =>
  instant('created_at')
    .notNull()
    .default(sql`CURRENT_TIMESTAMP(3)`);
